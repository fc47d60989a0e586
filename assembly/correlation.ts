/**
 * Correlation-sum histograms (Grassberger & Procaccia 1983, Physica D 9, 189) for all dimensions in one pass.
 *
 * A difference becomes a class, the number of radius edges ≤ it, 0 … 64, which the top bits of the double give
 * without a logarithm. Classing is monotone, so the class of a maximum is the maximum of classes: dimension
 * m + 1 costs one byte maximum. Two pairs at a time step one cell of a joint histogram of 65 × 65 cells,
 * whose margins are taken at the end: half the memory updates. Each dimension has two such tables: successive
 * pairs often hit the same cell, and an update must wait for the store before it in the same table.
 *
 * Class 64 (beyond the last edge) is dropped at the end. Pairs that are not admissible are given it at the
 * start, so that the loops have no branch on validity and may run past the end of a diagonal.
 */

/** Radius edges; also the class beyond the last. */
const EDGES: i32 = 64;
/** Classes 0 … 64. */
const CLASSES: i32 = 65;
/** Bytes of a row of a joint table, and of the table. */
const ROW: i32 = CLASSES << 2;
const TABLE: usize = <usize>(CLASSES * ROW);
/** Two tables a dimension. */
const TABLES: usize = TABLE << 1;
/** Lanes of a vector of classes. */
const LANES: i32 = 16;

/** Bytes of scratch for the tables of `dimensions` dimensions. */
export function correlationTablesSize(dimensions: i32): usize {
  return <usize>dimensions * TABLES;
}

/**
 * All pairs s < t with t − s > exclusion, diagonal by diagonal: |x_t − x_(t+lag)| is classed once for all
 * dimensions.
 * @param series f64, 32 readable samples beyond the end
 * @param barred u8[starts + 16]: 64 where no complete vector starts and beyond the end, else 0
 * @param base position of edge 0 among the quarter octaves, less 1
 * @param classes scratch, u8[samples + 32]
 * @param drainAfter pairs after which the u32 tables are emptied
 * @param histogram f64[dimensions · 65], zero at entry
 * @returns admissible pairs
 */
export function correlationCounts(
  series: usize, barred: usize, starts: i32, delay: i32, dimensions: i32, exclusion: i32, base: i32,
  classes: usize, tables: usize, drainAfter: f64, histogram: usize,
): f64 {
  memory.fill(tables, 0, correlationTablesSize(dimensions));
  let pairs: f64 = 0;
  let pending: f64 = 0;
  const reach = (dimensions - 1) * delay;
  for (let lag = exclusion + 1; lag < starts; lag++) {
    const count = starts - lag;
    if (pending + <f64>(count + LANES) > drainAfter) {
      drain(tables, dimensions, histogram);
      pending = 0;
    }
    pending += <f64>(count + LANES);
    // 15 more: the last vector of lanes reads past the end, where classes must be classes too.
    classDiagonal(series, series + (<usize>lag << 3), count + reach + LANES - 1, base, classes);
    pairs += <f64>tallyDiagonal(classes, barred, barred + <usize>lag, count, delay, dimensions, tables);
  }
  drain(tables, dimensions, histogram);
  return pairs;
}

/**
 * Pairs of each reference point with every start farther than `exclusion` from it.
 * @param barred as above; changed and restored
 */
export function correlationCountsFrom(
  series: usize, barred: usize, starts: i32, delay: i32, dimensions: i32, exclusion: i32, base: i32,
  references: usize, referenceCount: i32, window: usize, tables: usize, drainAfter: f64, histogram: usize,
): f64 {
  memory.fill(tables, 0, correlationTablesSize(dimensions));
  let pairs: f64 = 0;
  let pending: f64 = 0;
  for (let r = 0; r < referenceCount; r++) {
    if (pending + <f64>(starts + LANES) > drainAfter) {
      drain(tables, dimensions, histogram);
      pending = 0;
    }
    pending += <f64>(starts + LANES);
    const reference = load<i32>(references + (<usize>r << 2));
    // The Theiler window is barred for this reference only.
    const from = reference > exclusion ? reference - exclusion : 0;
    const to = exclusion < starts - reference ? reference + exclusion + 1 : starts;
    memory.copy(window, barred + <usize>from, <usize>(to - from));
    memory.fill(barred + <usize>from, <u8>EDGES, <usize>(to - from));
    pairs += <f64>tallyReference(
      series, series + (<usize>reference << 3), barred, starts, delay, dimensions, base, tables,
    );
    memory.copy(barred + <usize>from, window, <usize>(to - from));
  }
  drain(tables, dimensions, histogram);
  return pairs;
}

/** Classes of count differences a_t − b_t (up to 15 more are written). */
function classDiagonal(a: usize, b: usize, count: i32, base: i32, classes: usize): void {
  if (ASC_FEATURE_SIMD) {
    const bases = i16x8.splat(<i16>base);
    for (let t = 0; t < count; t += LANES, a += 128, b += 128, classes += 16)
      v128.store(classes, classOf16(
        f64x2.sub(v128.load(a), v128.load(b)), f64x2.sub(v128.load(a, 16), v128.load(b, 16)),
        f64x2.sub(v128.load(a, 32), v128.load(b, 32)), f64x2.sub(v128.load(a, 48), v128.load(b, 48)),
        f64x2.sub(v128.load(a, 64), v128.load(b, 64)), f64x2.sub(v128.load(a, 80), v128.load(b, 80)),
        f64x2.sub(v128.load(a, 96), v128.load(b, 96)), f64x2.sub(v128.load(a, 112), v128.load(b, 112)),
        bases,
      ));
  } else {
    for (let t = 0; t < count; t++, a += 8, b += 8, classes++)
      store<u8>(classes, <u8>classOf(load<f64>(a) - load<f64>(b), base));
  }
}

/** Tallies the pairs (t, t + lag) of one diagonal in every dimension; gives the number admissible. */
function tallyDiagonal(
  classes: usize, barredA: usize, barredB: usize, count: i32, delay: i32, dimensions: i32, tables: usize,
): i32 {
  let pairs = 0;
  const end = classes + <usize>count;
  const tablesEnd = tables + <usize>dimensions * TABLES;
  if (ASC_FEATURE_SIMD) {
    for (; classes < end; classes += 16, barredA += 16, barredB += 16) {
      let largest = v128.or(v128.load(barredA), v128.load(barredB));
      pairs += LANES - popcnt(i8x16.bitmask(i8x16.shl(largest, 1)));
      let at = classes;
      for (let table = tables; table < tablesEnd; table += TABLES, at += <usize>delay) {
        largest = i8x16.max_u(largest, v128.load(at));
        tally16(largest, table);
      }
    }
  } else {
    for (; classes < end; classes += 2, barredA += 2, barredB += 2) {
      let first = <u32>(load<u8>(barredA) | load<u8>(barredB));
      let second = <u32>(load<u8>(barredA, 1) | load<u8>(barredB, 1));
      pairs += i32(first == 0) + i32(second == 0);
      let at = classes;
      for (let table = tables; table < tablesEnd; table += TABLES, at += <usize>delay) {
        const c = <u32>load<u8>(at);
        const d = <u32>load<u8>(at, 1);
        first = c > first ? c : first;
        second = d > second ? d : second;
        step(table + <usize>(first << 2) + <usize>(second * ROW));
      }
    }
  }
  return pairs;
}

/** Tallies the pairs of one reference point in every dimension; gives the number admissible. */
function tallyReference(
  series: usize, reference: usize, barred: usize, starts: i32, delay: i32, dimensions: i32, base: i32,
  tables: usize,
): i32 {
  let pairs = 0;
  const end = barred + <usize>starts;
  const stride = <usize>delay << 3;
  const tablesEnd = tables + <usize>dimensions * TABLES;
  if (ASC_FEATURE_SIMD) {
    const bases = i16x8.splat(<i16>base);
    for (; barred < end; barred += 16, series += 128) {
      let largest = v128.load(barred);
      pairs += LANES - popcnt(i8x16.bitmask(i8x16.shl(largest, 1)));
      let x = series;
      let own = reference;
      for (let table = tables; table < tablesEnd; table += TABLES, x += stride, own += stride) {
        const a = v128.load_splat<f64>(own);
        largest = i8x16.max_u(largest, classOf16(
          f64x2.sub(v128.load(x), a), f64x2.sub(v128.load(x, 16), a),
          f64x2.sub(v128.load(x, 32), a), f64x2.sub(v128.load(x, 48), a),
          f64x2.sub(v128.load(x, 64), a), f64x2.sub(v128.load(x, 80), a),
          f64x2.sub(v128.load(x, 96), a), f64x2.sub(v128.load(x, 112), a),
          bases,
        ));
        tally16(largest, table);
      }
    }
  } else {
    for (; barred < end; barred += 2, series += 16) {
      let first = <u32>load<u8>(barred);
      let second = <u32>load<u8>(barred, 1);
      pairs += i32(first == 0) + i32(second == 0);
      let x = series;
      let own = reference;
      for (let table = tables; table < tablesEnd; table += TABLES, x += stride, own += stride) {
        const a = load<f64>(own);
        const c = classOf(load<f64>(x) - a, base);
        const d = classOf(load<f64>(x, 8) - a, base);
        first = c > first ? c : first;
        second = d > second ? d : second;
        step(table + <usize>(first << 2) + <usize>(second * ROW));
      }
    }
  }
  return pairs;
}

/** Class of a difference: its quarter octave (exponent and top two bits of the mantissa) counted from the first edge. */
// @ts-ignore: decorator
@inline
function classOf(difference: f64, base: i32): u32 {
  const position = <i32>((reinterpret<u64>(difference) >> 50) & 0x1fff) - base;
  return position < 0 ? 0 : position > EDGES ? <u32>EDGES : <u32>position;
}

/** The same for 16 differences. */
// @ts-ignore: decorator
@inline
function classOf16(
  a: v128, b: v128, c: v128, d: v128, e: v128, f: v128, g: v128, h: v128, bases: v128,
): v128 {
  const low = i16x8.narrow_i32x4_s(quarters(a, b), quarters(c, d));
  const high = i16x8.narrow_i32x4_s(quarters(e, f), quarters(g, h));
  return i8x16.min_u(
    i8x16.narrow_i16x8_u(i16x8.sub(low, bases), i16x8.sub(high, bases)),
    i8x16.splat(<i8>EDGES),
  );
}

/** Quarter octaves of four doubles from their high words, sign dropped. */
// @ts-ignore: decorator
@inline
function quarters(a: v128, b: v128): v128 {
  return i32x4.shr_u(i32x4.shl(v128.shuffle<i32>(a, b, 1, 3, 5, 7), 1), 19);
}

/** Steps the cells of the 8 pairs of neighbouring bytes, even ones in the first table, odd ones in the second. */
// @ts-ignore: decorator
@inline
function tally16(classes: v128, table: usize): void {
  const cells = i16x8.add(
    i16x8.shl(v128.and(classes, i16x8.splat(0xff)), 2),
    i16x8.mul(i16x8.shr_u(classes, 8), i16x8.splat(<i16>ROW)),
  );
  const odd = table + TABLE;
  const low = i64x2.extract_lane(cells, 0);
  const high = i64x2.extract_lane(cells, 1);
  step(table + <usize>(<u32>low & 0xffff));
  step(odd + <usize>(<u32>low >>> 16));
  step(table + <usize>(<u32>(low >>> 32) & 0xffff));
  step(odd + <usize>(low >>> 48));
  step(table + <usize>(<u32>high & 0xffff));
  step(odd + <usize>(<u32>high >>> 16));
  step(table + <usize>(<u32>(high >>> 32) & 0xffff));
  step(odd + <usize>(high >>> 48));
}

// @ts-ignore: decorator
@inline
function step(cell: usize): void {
  store<u32>(cell, load<u32>(cell) + 1);
}

/** Adds the margins of the joint tables to the histogram and empties them. */
function drain(tables: usize, dimensions: i32, histogram: usize): void {
  for (let d = 0; d < dimensions; d++, histogram += <usize>CLASSES << 3)
    for (let copy = 0; copy < 2; copy++)
      for (let second = 0; second < CLASSES; second++)
        for (let first = 0; first < CLASSES; first++, tables += 4) {
          const n = <f64>load<u32>(tables);
          if (n == 0) continue;
          add(histogram + (<usize>first << 3), n);
          add(histogram + (<usize>second << 3), n);
          store<u32>(tables, 0);
        }
}

// @ts-ignore: decorator
@inline
function add(at: usize, n: f64): void {
  store<f64>(at, load<f64>(at) + n);
}
