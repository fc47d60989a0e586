import { log } from '../base/elementary.ts';
import type { DivergenceInput, DivergenceSums, NeighbourhoodDivergenceInput } from '../base/kernels.ts';

/** ln 2. */
const LN2 = Math.LN2;
/** Running products stay between 2^−256 and 2^256: a factor (≤ 2^512, ≥ 2^−537 by squares) cannot overflow them. */
const HIGH = 2 ** 256;
const LOW = 2 ** -256;

/**
 * Sums of logarithms as running products: one logarithm per (block, step) instead of one per distance.
 * Rescaling by powers of two is exact, so the result depends on the order of the factors only.
 */
class LogProducts {
  readonly products: Float64Array;
  readonly exponents: Int32Array;
  readonly counts: Float64Array;

  constructor(size: number) {
    this.products = new Float64Array(size).fill(1);
    this.exponents = new Int32Array(size);
    this.counts = new Float64Array(size);
  }

  multiply(at: number, factor: number): void {
    let product = this.products[at]! * factor;
    if (product >= HIGH) {
      product *= LOW;
      this.exponents[at] = this.exponents[at]! + 256;
    } else if (product < LOW) {
      product *= HIGH;
      this.exponents[at] = this.exponents[at]! - 256;
    }
    this.products[at] = product;
    this.counts[at] = this.counts[at]! + 1;
  }

  sums(): DivergenceSums {
    return { logSums: logSums(this.products, this.exponents), counts: this.counts };
  }
}

/** ln(product · 2^exponent) for each entry; 0 for an empty product. Shared with the wasm marshalling. */
export function logSums(products: Float64Array, exponents: Int32Array): Float64Array {
  return Float64Array.from(products, (product, i) => log(product) + exponents[i]! * LN2);
}

export function divergenceSums(input: DivergenceInput): DivergenceSums {
  const { data, first, second, lengths, offsets, steps, blockStarts } = input;
  const blocks = blockStarts.length - 1;
  const width = steps + 1;
  const sums = new LogProducts(blocks * width);
  const only = offsets.length === 1 ? offsets[0]! : undefined;
  for (let b = 0; b < blocks; b++)
    for (let p = blockStarts[b]!; p < blockStarts[b + 1]!; p++) {
      const i = first[p]!;
      const j = second[p]!;
      for (let s = 0; s <= lengths[p]!; s++) {
        let distance: number;
        if (only !== undefined) distance = Math.abs(data[i + s + only]! - data[j + s + only]!);
        else {
          let square = 0;
          for (let d = 0; d < offsets.length; d++) {
            const difference = data[i + s + offsets[d]!]! - data[j + s + offsets[d]!]!;
            square += difference * difference;
          }
          distance = Math.sqrt(square);
        }
        if (distance > 0) sums.multiply(b * width + s, distance);
      }
    }
  return sums.sums();
}

export function neighbourhoodDivergence(input: NeighbourhoodDivergenceInput): DivergenceSums {
  const { data, references, rowStarts, neighbours, lengths, steps, blockStarts } = input;
  const blocks = blockStarts.length - 1;
  const width = steps + 1;
  const sums = new LogProducts(blocks * width);
  const total = new Float64Array(width);
  const followed = new Float64Array(width);
  for (let b = 0; b < blocks; b++)
    for (let r = blockStarts[b]!; r < blockStarts[b + 1]!; r++) {
      const i = references[r]!;
      total.fill(0);
      followed.fill(0);
      for (let p = rowStarts[r]!; p < rowStarts[r + 1]!; p++) {
        const j = neighbours[p]!;
        for (let s = 0; s <= lengths[p]!; s++) {
          total[s] = total[s]! + Math.abs(data[i + s]! - data[j + s]!);
          followed[s] = followed[s]! + 1;
        }
      }
      for (let s = 0; s < width; s++)
        if (total[s]! > 0) sums.multiply(b * width + s, total[s]! / followed[s]!);
    }
  return sums.sums();
}
