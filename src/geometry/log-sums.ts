import { log, powerOfTwo } from '../base/elementary.ts';
import { CORRELATION_EDGES } from '../base/kernels.ts';
import type { PairCounts } from './sums.ts';

const EDGES = CORRELATION_EDGES;

/**
 * Logarithms of correlation sums over all blocks of reference points and over all but one, with running
 * totals so that a straight-line slope over any range of radii costs a few operations.
 */
export class LogSums {
  readonly dimensions: number;
  readonly radii: Float64Array;
  readonly logRadii: Float64Array;
  /** Total counts, row-major dimensions × 64, and pairs. */
  readonly counts: Float64Array;
  readonly pairs: number;
  /** Variants: 0 holds all blocks, v the rest without block v − 1. */
  readonly variants: number;
  /** ln C, row-major variants × dimensions × 64; −Infinity where the count is 0. */
  readonly logs: Float64Array;
  readonly #y: Float64Array;
  readonly #xy: Float64Array;
  readonly #x: Float64Array;
  readonly #xx: Float64Array;

  constructor(blocks: readonly PairCounts[], dimensions: number, smallestExponent: number) {
    this.dimensions = dimensions;
    this.variants = blocks.length + 1;
    this.radii = Float64Array.from(
      { length: EDGES },
      (_, b) => powerOfTwo(smallestExponent + (b >> 2)) * (1 + (b & 3) / 4),
    );
    this.logRadii = this.radii.map((r) => log(r));
    this.counts = new Float64Array(dimensions * EDGES);
    let pairs = 0;
    for (const block of blocks) {
      for (let i = 0; i < this.counts.length; i++) this.counts[i]! += block.counts[i]!;
      pairs += block.pairs;
    }
    this.pairs = pairs;
    const size = dimensions * EDGES;
    this.logs = new Float64Array(this.variants * size);
    for (let v = 0; v < this.variants; v++) {
      const left = v === 0 ? undefined : blocks[v - 1]!;
      const all = log(Math.max(1, pairs - (left?.pairs ?? 0)));
      for (let i = 0; i < size; i++)
        this.logs[v * size + i] = log(this.counts[i]! - (left?.counts[i] ?? 0)) - all;
    }
    // Running totals over the edges; edges without pairs are kept out of ranges by `usable`.
    const rows = this.variants * dimensions;
    this.#y = new Float64Array(rows * (EDGES + 1));
    this.#xy = new Float64Array(rows * (EDGES + 1));
    this.#x = new Float64Array(EDGES + 1);
    this.#xx = new Float64Array(EDGES + 1);
    for (let b = 0; b < EDGES; b++) {
      const x = this.logRadii[b]!;
      this.#x[b + 1] = this.#x[b]! + x;
      this.#xx[b + 1] = this.#xx[b]! + x * x;
      for (let r = 0; r < rows; r++) {
        const y = this.logs[r * EDGES + b]!;
        const at = r * (EDGES + 1) + b;
        const known = Number.isFinite(y) ? y : 0;
        this.#y[at + 1] = this.#y[at]! + known;
        this.#xy[at + 1] = this.#xy[at]! + x * known;
      }
    }
  }

  count(dimension: number, edge: number): number {
    return this.counts[(dimension - 1) * EDGES + edge]!;
  }

  log(variant: number, dimension: number, edge: number): number {
    return this.logs[(variant * this.dimensions + dimension - 1) * EDGES + edge]!;
  }

  /** Least-squares slope of ln C on ln radius over edges from … to (both included). */
  slope(variant: number, dimension: number, from: number, to: number): number {
    const n = to - from + 1;
    const at = (variant * this.dimensions + dimension - 1) * (EDGES + 1);
    const x = this.#x[to + 1]! - this.#x[from]!;
    const xx = this.#xx[to + 1]! - this.#xx[from]!;
    const y = this.#y[at + to + 1]! - this.#y[at + from]!;
    const xy = this.#xy[at + to + 1]! - this.#xy[at + from]!;
    return (n * xy - x * y) / (n * xx - x * x);
  }

  /** Mean of ln C over edges from … to. */
  mean(variant: number, dimension: number, from: number, to: number): number {
    const at = (variant * this.dimensions + dimension - 1) * (EDGES + 1);
    return (this.#y[at + to + 1]! - this.#y[at + from]!) / (to - from + 1);
  }

  /**
   * Standard error of a quantity by the block jackknife (Tukey 1958), doubled: a block left out is left out
   * as reference points only, while its points stay partners, and the variance of a sum over pairs has equal
   * parts from both, fully correlated (Hoeffding 1948, Ann. Math. Stat. 19, 293).
   */
  standardError(quantity: (variant: number) => number): number {
    const blocks = this.variants - 1;
    let sum = 0;
    let squares = 0;
    const first = quantity(1);
    for (let v = 1; v <= blocks; v++) {
      const d = quantity(v) - first;
      sum += d;
      squares += d * d;
    }
    return 2 * Math.sqrt((Math.max(0, squares - (sum * sum) / blocks) * (blocks - 1)) / blocks);
  }
}

/** 95 % quantile of Student's t with 19 degrees of freedom (two-sided 90 %). */
export const STUDENT_90 = 1.729;
/** Level of the intervals made with it. */
export const LEVEL = 0.9;
