/**
 * Sums of ln distance over pairs, for every step of the pairs' common future (Rosenstein, Collins & De Luca 1993,
 * Physica D 65, 117; Kantz 1994, Phys. Lett. A 185, 77), as running products: one logarithm a (block, step), which
 * the host takes. Steps are neighbours in memory, so lanes run over steps; four pairs at a time, in order, save
 * traffic in products. Moving a power of two from a product to its exponent is exact, so the bits of the mantissa
 * depend on the order of the factors alone. Twin of src/fallback/divergence.ts.
 *
 * The host scales `data` to magnitudes below 2. Factors are then at most 16 · offsets, so a product that has left
 * LOW … HIGH in the middle of four factors is still outside after them, where it is noticed.
 *
 * Sums of one block: `width` (steps + 1 rounded up to even) doubles of products, then as many i64 exponents and
 * i64 counts of zero factors.
 */

const HIGH: f64 = 1.157920892373162e77; // 2^256
const LOW: f64 = 8.636168555094445e-78; // 2^-256

/** Bytes of scratch: sums and end counts of a block, four rows of factors, a row of shared squares. */
export function divergenceScratchSize(steps: i32, sharedSpan: i32): usize {
  return 3 * evenWidth(steps) + endsBytes(steps) + 4 * evenWidth(steps) + evenWidth(steps + sharedSpan);
}

/**
 * @param scratch `divergenceScratchSize` bytes
 * @param out f64[3 · blocks · (steps + 1)]: products, exponents, counts
 */
export function divergenceSums(
  data: usize, first: usize, second: usize, lengths: usize, offsets: usize, offsetCount: i32,
  steps: i32, blockStarts: usize, blocks: i32, scratch: usize, out: usize,
): void {
  const width = evenWidth(steps);
  const sums = scratch;
  const ends = sums + 3 * width;
  const rows = ends + endsBytes(steps);
  const shared = rows + 4 * width;
  const single = offsetCount == 1;
  const own = single ? data + shift(load<i32>(offsets)) : data;
  for (let b = 0; b < blocks; b++) {
    clear(sums, width, ends, steps);
    let p = load<i32>(blockStarts + (<usize>b << 2));
    const end = load<i32>(blockStarts + (<usize>b << 2), 4);
    const all = end - p;
    for (let i = p; i < end; i++) countEnd(ends, at(lengths, i));
    for (; p < end; p += 4) {
      const group = end - p < 4 ? end - p : 4;
      let common = steps;
      for (let k = 0; k < group; k++) {
        const length = at(lengths, p + k);
        common = length < common ? length : common;
        if (!single)
          squares(
            data + shift(at(first, p + k)), data + shift(at(second, p + k)), length, offsets, offsetCount, steps,
            rows + <usize>k * width, shared,
          );
      }
      let done = 0;
      if (group == 4)
        done = single
          ? multiplyDifferences(
              own + shift(at(first, p)), own + shift(at(second, p)),
              own + shift(at(first, p + 1)), own + shift(at(second, p + 1)),
              own + shift(at(first, p + 2)), own + shift(at(second, p + 2)),
              own + shift(at(first, p + 3)), own + shift(at(second, p + 3)),
              common, sums, width,
            )
          : multiplyRows(rows, common, sums, width);
      for (let k = 0; k < group; k++) {
        const length = at(lengths, p + k);
        if (length < done) continue;
        const row = rows + <usize>k * width;
        if (single) differences(own + shift(at(first, p + k)), own + shift(at(second, p + k)), done, length, row);
        multiplyRow(row, done, length, sums, width);
      }
    }
    results(sums, width, ends, all, steps, out + shift(b * (steps + 1)), shift(blocks * (steps + 1)));
  }
}

/**
 * Products of means of |difference| over the neighbours of each reference that are still followed.
 * @param scratch, out as above
 */
export function neighbourhoodDivergence(
  data: usize, references: usize, rowStarts: usize, neighbours: usize, lengths: usize,
  steps: i32, blockStarts: usize, blocks: i32, scratch: usize, out: usize,
): void {
  const width = evenWidth(steps);
  const sums = scratch;
  const ends = sums + 3 * width;
  const row = ends + endsBytes(steps);
  for (let b = 0; b < blocks; b++) {
    clear(sums, width, ends, steps);
    let r = load<i32>(blockStarts + (<usize>b << 2));
    const end = load<i32>(blockStarts + (<usize>b << 2), 4);
    const all = end - r;
    for (; r < end; r++) {
      memory.fill(row, 0, shift(steps + 1));
      memory.fill(ends, 0, endsBytes(steps));
      const reference = data + shift(at(references, r));
      const last = at(rowStarts, r + 1);
      const from = at(rowStarts, r);
      for (let p = from; p < last; p++) {
        const length = at(lengths, p);
        countEnd(ends, length);
        addDifferences(reference, data + shift(at(neighbours, p)), length, row);
      }
      means(row, ends, last - from, steps);
      multiplyRow(row, 0, steps, sums, width);
    }
    memory.fill(ends, 0, endsBytes(steps));
    results(sums, width, ends, all, steps, out + shift(b * (steps + 1)), shift(blocks * (steps + 1)));
  }
}

// @ts-ignore: decorator
@inline
function shift(samples: i32): usize {
  return <usize>samples << 3;
}

// @ts-ignore: decorator
@inline
function at(array: usize, i: i32): i32 {
  return load<i32>(array + (<usize>i << 2));
}

// @ts-ignore: decorator
@inline
function countEnd(ends: usize, length: i32): void {
  const cell = ends + (<usize>length << 2);
  store<i32>(cell, load<i32>(cell) + 1);
}

/** Bytes of one part of the sums. */
// @ts-ignore: decorator
@inline
function evenWidth(steps: i32): usize {
  return <usize>((steps + 2) & ~1) << 3;
}

/** Bytes of the end counts, in whole vectors. */
// @ts-ignore: decorator
@inline
function endsBytes(steps: i32): usize {
  return (<usize>(steps + 4) & ~3) << 2;
}

function clear(sums: usize, width: usize, ends: usize, steps: i32): void {
  memory.fill(sums + width, 0, 2 * width);
  memory.fill(ends, 0, endsBytes(steps));
  for (let i: usize = 0; i < width; i += 8) store<f64>(sums + i, 1);
}

/** Out of a block's sums. `ends[s]`: how many of its `all` factors end with step s; the rest go on. */
function results(sums: usize, width: usize, ends: usize, all: i32, steps: i32, out: usize, part: usize): void {
  let followed = <i64>all;
  for (let s = 0; s <= steps; s++, sums += 8, out += 8) {
    store<f64>(out, load<f64>(sums));
    store<f64>(out + part, <f64>load<i64>(sums + width));
    store<f64>(out + 2 * part, <f64>(followed - load<i64>(sums + 2 * width)));
    followed -= <i64>at(ends, s);
  }
}

/** Multiplies by the factors of four pairs, steps 0 … common; gives the first step left to do (even). */
function multiplyDifferences(
  a0: usize, b0: usize, a1: usize, b1: usize, a2: usize, b2: usize, a3: usize, b3: usize,
  common: i32, sums: usize, width: usize,
): i32 {
  let s = 0;
  if (ASC_FEATURE_SIMD) {
    for (; s < common; s += 2, sums += 16) {
      const i = shift(s);
      multiply4(
        f64x2.abs(f64x2.sub(v128.load(a0 + i), v128.load(b0 + i))),
        f64x2.abs(f64x2.sub(v128.load(a1 + i), v128.load(b1 + i))),
        f64x2.abs(f64x2.sub(v128.load(a2 + i), v128.load(b2 + i))),
        f64x2.abs(f64x2.sub(v128.load(a3 + i), v128.load(b3 + i))),
        sums, width,
      );
    }
  }
  return s;
}

function multiplyRows(rows: usize, common: i32, sums: usize, width: usize): i32 {
  let s = 0;
  if (ASC_FEATURE_SIMD) {
    for (; s < common; s += 2, sums += 16, rows += 16)
      multiply4(
        v128.load(rows), v128.load(rows + width), v128.load(rows + 2 * width), v128.load(rows + 3 * width),
        sums, width,
      );
  }
  return s;
}

/** Two steps of four pairs, in the order of the pairs. */
// @ts-ignore: decorator
@inline
function multiply4(f0: v128, f1: v128, f2: v128, f3: v128, sums: usize, width: usize): void {
  const none = f64x2.splat(0);
  const one = f64x2.splat(1);
  const z0 = f64x2.eq(f0, none);
  const z1 = f64x2.eq(f1, none);
  const z2 = f64x2.eq(f2, none);
  const z3 = f64x2.eq(f3, none);
  // A zero factor becomes one, without a branch: quantised records have many.
  const product = f64x2.mul(
    f64x2.mul(
      f64x2.mul(
        f64x2.mul(v128.load(sums), v128.or(f0, v128.and(z0, one))),
        v128.or(f1, v128.and(z1, one)),
      ),
      v128.or(f2, v128.and(z2, one)),
    ),
    v128.or(f3, v128.and(z3, one)),
  );
  if (inRange(product)) {
    v128.store(sums, product);
    const zeros = sums + 2 * width;
    v128.store(zeros, i64x2.sub(v128.load(zeros), i64x2.add(i64x2.add(z0, z1), i64x2.add(z2, z3))));
  } else {
    multiply2(f0, sums, width);
    multiply2(f1, sums, width);
    multiply2(f2, sums, width);
    multiply2(f3, sums, width);
  }
}

/** Two steps of one pair, each on its own: a product has left the range, or a factor is zero. */
function multiply2(factor: v128, sums: usize, width: usize): void {
  multiply(f64x2.extract_lane(factor, 0), sums, width);
  multiply(f64x2.extract_lane(factor, 1), sums + 8, width);
}

// @ts-ignore: decorator
@inline
function inRange(product: v128): bool {
  return v128.all_true<i64>(
    v128.and(f64x2.ge(product, f64x2.splat(LOW)), f64x2.lt(product, f64x2.splat(HIGH))),
  );
}

/** Multiplies by row[from … length] of one pair; `from` is even. */
function multiplyRow(row: usize, from: i32, length: i32, sums: usize, width: usize): void {
  sums += shift(from);
  row += shift(from);
  let s = from;
  if (ASC_FEATURE_SIMD) {
    for (; s < length; s += 2, sums += 16, row += 16) {
      const factor = v128.load(row);
      const product = f64x2.mul(v128.load(sums), factor);
      if (inRange(product)) v128.store(sums, product);
      else multiply2(factor, sums, width);
    }
  }
  for (; s <= length; s++, sums += 8, row += 8) multiply(load<f64>(row), sums, width);
}

/** One factor, at the address of its product. */
function multiply(factor: f64, sums: usize, width: usize): void {
  let product = load<f64>(sums) * factor;
  if (product >= LOW && product < HIGH) {
    store<f64>(sums, product);
    return;
  }
  if (factor == 0) {
    const zeros = sums + 2 * width;
    store<i64>(zeros, load<i64>(zeros) + 1);
    return;
  }
  let exponent = load<i64>(sums + width);
  for (; factor < LOW; factor *= HIGH) exponent -= 256;
  product = load<f64>(sums) * factor;
  for (; product < LOW; product *= HIGH) exponent -= 256;
  for (; product >= HIGH; product *= LOW) exponent += 256;
  store<f64>(sums, product);
  store<i64>(sums + width, exponent);
}

/** row[s] = |a_s − b_s| for steps from … length. */
function differences(a: usize, b: usize, from: i32, length: i32, row: usize): void {
  for (let i = shift(from); i <= shift(length); i += 8)
    store<f64>(row + i, Math.abs(load<f64>(a + i) - load<f64>(b + i)));
}

/** row[s] += |a_s − b_s| for steps 0 … length. */
function addDifferences(a: usize, b: usize, length: i32, row: usize): void {
  const end = row + shift(length);
  if (ASC_FEATURE_SIMD) {
    for (; row < end; row += 16, a += 16, b += 16)
      v128.store(row, f64x2.add(v128.load(row), f64x2.abs(f64x2.sub(v128.load(a), v128.load(b)))));
  }
  for (; row <= end; row += 8, a += 8, b += 8)
    store<f64>(row, load<f64>(row) + Math.abs(load<f64>(a) - load<f64>(b)));
}

/** Divides row[s] by the number of neighbours followed for s steps or more; 0 where there are none. */
function means(row: usize, ends: usize, neighbours: i32, steps: i32): void {
  for (let s = 0; s <= steps; s++, row += 8) {
    if (neighbours > 0) store<f64>(row, load<f64>(row) / <f64>neighbours);
    neighbours -= at(ends, s);
  }
}

/**
 * row[s] = squared distance over the offsets, added in their order, for steps 0 … length. Where the offsets lie
 * close, each squared difference is computed once and serves all of them.
 */
function squares(
  a: usize, b: usize, length: i32, offsets: usize, count: i32, steps: i32, row: usize, shared: usize,
): void {
  let low = at(offsets, 0);
  let high = low;
  for (let d = 1; d < count; d++) {
    const offset = at(offsets, d);
    low = offset < low ? offset : low;
    high = offset > high ? offset : high;
  }
  const span = high - low;
  if (span >= (count - 1) * (steps + 1)) {
    for (let d = 0; d < count; d++) {
      const offset = shift(at(offsets, d));
      addSquares(a + offset, b + offset, length, row, d == 0);
    }
    return;
  }
  addSquares(a + shift(low), b + shift(low), length + span, shared, true);
  for (let d = 0; d < count; d++) addRow(shared + shift(at(offsets, d) - low), length, row, d == 0);
}

/** row[s] (+)= (a_s − b_s)² for steps 0 … length. */
function addSquares(a: usize, b: usize, length: i32, row: usize, fresh: bool): void {
  const end = row + shift(length);
  if (ASC_FEATURE_SIMD) {
    for (; row < end; row += 16, a += 16, b += 16) {
      const difference = f64x2.sub(v128.load(a), v128.load(b));
      const square = f64x2.mul(difference, difference);
      v128.store(row, fresh ? square : f64x2.add(v128.load(row), square));
    }
  }
  for (; row <= end; row += 8, a += 8, b += 8) {
    const difference = load<f64>(a) - load<f64>(b);
    const square = difference * difference;
    store<f64>(row, fresh ? square : load<f64>(row) + square);
  }
}

/** row[s] (+)= terms[s] for steps 0 … length. */
function addRow(terms: usize, length: i32, row: usize, fresh: bool): void {
  const end = row + shift(length);
  if (ASC_FEATURE_SIMD) {
    for (; row < end; row += 16, terms += 16)
      v128.store(row, fresh ? v128.load(terms) : f64x2.add(v128.load(row), v128.load(terms)));
  }
  for (; row <= end; row += 8, terms += 8)
    store<f64>(row, fresh ? load<f64>(terms) : load<f64>(row) + load<f64>(terms));
}
