import { log, powerOfTwo } from '../base/elementary.ts';
import type { DivergenceInput, DivergenceSums, NeighbourhoodDivergenceInput } from '../base/kernels.ts';

const HIGH = 2 ** 256;
const LOW = 2 ** -256;
const HIGH_WORD = new Uint8Array(Uint16Array.of(1).buffer)[0] === 1 ? 1 : 0;

export function divergenceSums(input: DivergenceInput): DivergenceSums {
  const { first, second, lengths, offsets, steps, blockStarts } = input;
  const { data, exponent } = scaledData(input.data);
  const blocks = blockStarts.length - 1;
  const sums = new LogProducts(blocks, steps + 1);
  const fill = offsets.length === 1 ? differences(data, offsets[0]!) : squares(data, offsets, steps);
  const row = new Float64Array(steps + 1);
  for (let b = 0; b < blocks; b++)
    for (let p = blockStarts[b]!; p < blockStarts[b + 1]!; p++) {
      fill(first[p]!, second[p]!, lengths[p]!, row);
      sums.multiply(b, row, lengths[p]!);
    }
  // Several offsets: the factors were squares of distances.
  return sums.results(offsets.length === 1 ? 1 : 0.5, exponent);
}

export function neighbourhoodDivergence(input: NeighbourhoodDivergenceInput): DivergenceSums {
  const { references, rowStarts, neighbours, lengths, steps, blockStarts } = input;
  const { data, exponent } = scaledData(input.data);
  const blocks = blockStarts.length - 1;
  const sums = new LogProducts(blocks, steps + 1);
  const row = new Float64Array(steps + 1);
  const followed = new Int32Array(steps + 1);
  for (let b = 0; b < blocks; b++)
    for (let r = blockStarts[b]!; r < blockStarts[b + 1]!; r++) {
      const i = references[r]!;
      row.fill(0);
      followed.fill(0);
      for (let p = rowStarts[r]!; p < rowStarts[r + 1]!; p++) {
        const j = neighbours[p]!;
        const length = lengths[p]!;
        for (let s = 0; s <= length; s++) row[s]! += Math.abs(data[i + s]! - data[j + s]!);
        followed[length]!++;
      }
      // followed[s]: neighbours followed for exactly s steps, then for s steps or more.
      for (let s = steps; s > 0; s--) followed[s - 1]! += followed[s]!;
      for (let s = 0; s <= steps; s++) row[s] = followed[s] === 0 ? 0 : row[s]! / followed[s]!;
      sums.multiply(b, row, steps);
    }
  return sums.results(1, exponent);
}

/**
 * The data divided by the power of two that brings the largest magnitude to 1 … 2, and that power's exponent:
 * exact, and squares of differences cannot overflow. They vanish below 2^−537 of the largest magnitude, where
 * distances over several offsets count as zero. Missing samples stay missing.
 */
export function scaledData(data: Float64Array): { readonly data: Float64Array; readonly exponent: number } {
  let largest = 0;
  for (let t = 0; t < data.length; t++) {
    const size = Math.abs(data[t]!);
    if (size > largest && size < Number.POSITIVE_INFINITY) largest = size;
  }
  if (largest === 0) return { data, exponent: 0 };
  const words = new Int32Array(Float64Array.of(largest).buffer);
  const exponent = (words[HIGH_WORD]! >> 20) - 1023; // −1023: subnormal, brought near enough to 1 by 2^1022
  // In two factors, since 2^−exponent alone may leave the range of doubles.
  const half = powerOfTwo(-(exponent >> 1));
  const rest = powerOfTwo((exponent >> 1) - exponent);
  return { data: data.map((x) => x * half * rest), exponent };
}

type FillRow = (i: number, j: number, length: number, row: Float64Array) => void;

/** |difference| of one sample, step by step. */
function differences(data: Float64Array, offset: number): FillRow {
  return (i, j, length, row) => {
    for (let s = 0, a = i + offset, b = j + offset; s <= length; s++, a++, b++)
      row[s] = Math.abs(data[a]! - data[b]!);
  };
}

/**
 * Squares of the distance over several offsets, added in the order of the offsets. Where the offsets lie close,
 * each squared difference is computed once and serves all of them.
 */
function squares(data: Float64Array, offsets: Int32Array, steps: number): FillRow {
  const low = offsets.reduce((a, b) => Math.min(a, b));
  const span = offsets.reduce((a, b) => Math.max(a, b)) - low;
  if (span >= (offsets.length - 1) * (steps + 1))
    return (i, j, length, row) => {
      row.fill(0, 0, length + 1);
      for (let d = 0; d < offsets.length; d++)
        for (let s = 0, a = i + offsets[d]!, b = j + offsets[d]!; s <= length; s++, a++, b++) {
          const difference = data[a]! - data[b]!;
          row[s]! += difference * difference;
        }
    };
  const shared = new Float64Array(steps + 1 + span);
  return (i, j, length, row) => {
    for (let s = 0, a = i + low, b = j + low; s <= length + span; s++, a++, b++) {
      const difference = data[a]! - data[b]!;
      shared[s] = difference * difference;
    }
    row.fill(0, 0, length + 1);
    for (let d = 0; d < offsets.length; d++)
      for (let s = 0, at = offsets[d]! - low; s <= length; s++, at++) row[s]! += shared[at]!;
  };
}

/**
 * Sums of logarithms as running products, mantissa and exponent apart: one logarithm a (block, step) instead of
 * one a distance. Moving a power of two is exact, so the bits depend on the order of the factors only.
 */
class LogProducts {
  readonly #width: number;
  readonly #products: Float64Array;
  readonly #exponents: Float64Array;
  readonly #counts: Float64Array;

  constructor(blocks: number, width: number) {
    this.#width = width;
    this.#products = new Float64Array(blocks * width).fill(1);
    this.#exponents = new Float64Array(blocks * width);
    this.#counts = new Float64Array(blocks * width);
  }

  /** Multiplies the products of a block by row[0 … length]; zero factors are left out. */
  multiply(block: number, row: Float64Array, length: number): void {
    const products = this.#products;
    const counts = this.#counts;
    for (let s = 0, at = block * this.#width; s <= length; s++, at++) {
      const factor = row[s]!;
      const product = products[at]! * factor;
      if (product >= LOW && product < HIGH) {
        products[at] = product;
        counts[at]!++;
      } else if (factor > 0) this.#rescale(at, factor);
    }
  }

  #rescale(at: number, factor: number): void {
    let product = this.#products[at]!;
    let exponent = this.#exponents[at]!;
    for (; factor < LOW; factor *= HIGH) exponent -= 256;
    product *= factor;
    for (; product < LOW; product *= HIGH) exponent -= 256;
    for (; product >= HIGH; product *= LOW) exponent += 256;
    this.#products[at] = product;
    this.#exponents[at] = exponent;
    this.#counts[at]!++;
  }

  results(power: number, exponent: number): DivergenceSums {
    return sumsOf(this.#products, this.#exponents, this.#counts, power, exponent);
  }
}

/**
 * power · ln(product · 2^exponent) + count · dataExponent · ln 2 for each entry, 0 for an empty product. `power`
 * is 1, or ½ where the factors are squares. The product is brought to 1 … 2 first, so that the bits do not
 * depend on when a backend moved powers of two.
 */
export function sumsOf(
  products: Float64Array,
  exponents: Float64Array,
  counts: Float64Array,
  power: number,
  dataExponent: number,
): DivergenceSums {
  const words = new Int32Array(products.buffer, products.byteOffset);
  const logSums = products.map((product, i) => {
    const own = (words[2 * i + HIGH_WORD]! >> 20) - 1023;
    const mantissa = product * powerOfTwo(-own);
    // Powers of two are added up exactly, before they meet a logarithm.
    const twos = power * (exponents[i]! + own) + counts[i]! * dataExponent;
    return power * log(mantissa) + twos * Math.LN2;
  });
  return { logSums, counts };
}
