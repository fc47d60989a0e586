/**
 * Sums of ln distance over pairs, for every step of the pairs' common future (Rosenstein, Collins & De Luca 1993,
 * Physica D 65, 117; Kantz 1994, Phys. Lett. A 185, 77). Steps are neighbours in memory, so lanes run over steps;
 * four pairs at a time save traffic in products. The host scales `data` to magnitudes below 2.
 * Twin of src/fallback/divergence.ts.
 */

import { at, clear, countEnd, endsBytes, evenWidth, multiply4, multiplyRow, results, shift } from './log-products';

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
