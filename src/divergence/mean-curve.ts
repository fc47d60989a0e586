import { log } from '../base/elementary.ts';
import type { DivergenceSums } from '../base/kernels.ts';
import { BLOCKS } from './curve.ts';

/**
 * Mean ln distance by step, over all blocks of references (variant 0) and without block v − 1 (variant v), with
 * running totals, so that a straight-line slope over any range of steps costs a few operations.
 */
export class MeanCurve {
  readonly steps: number;
  readonly variants = BLOCKS + 1;
  /** Row-major variants × (steps + 1). NaN where no pair is apart. */
  readonly values: Float64Array;
  readonly #y: Float64Array;
  readonly #xy: Float64Array;

  constructor(sums: DivergenceSums, steps: number) {
    this.steps = steps;
    const width = steps + 1;
    this.values = new Float64Array(this.variants * width);
    this.#y = new Float64Array(this.variants * (width + 1));
    this.#xy = new Float64Array(this.variants * (width + 1));
    for (let v = 0; v < this.variants; v++)
      for (let s = 0; s < width; s++) {
        let [total, count] = [0, 0];
        for (let b = 0; b < BLOCKS; b++) {
          if (b === v - 1) continue;
          total += sums.logSums[b * width + s]!;
          count += sums.counts[b * width + s]!;
        }
        const y = total / count;
        this.values[v * width + s] = y;
        const known = Number.isFinite(y) ? y : 0;
        const at = v * (width + 1) + s;
        this.#y[at + 1] = this.#y[at]! + known;
        this.#xy[at + 1] = this.#xy[at]! + s * known;
      }
  }

  value(step: number): number {
    return this.values[step]!;
  }

  /** Are there pairs apart at every step from … to, in every variant? */
  known(from: number, to: number): boolean {
    const width = this.steps + 1;
    for (let v = 0; v < this.variants; v++)
      for (let s = from; s <= to; s++) if (!Number.isFinite(this.values[v * width + s]!)) return false;
    return true;
  }

  /** Least-squares slope per step over from … to (both included). */
  slope(variant: number, from: number, to: number): number {
    const n = to - from + 1;
    const x = ((from + to) / 2) * n;
    // Σ s² over the range, about its middle: n(n² − 1)/12.
    const xx = (n * (n * n - 1)) / 12;
    const at = variant * (this.steps + 2);
    const y = this.#y[at + to + 1]! - this.#y[at + from]!;
    const xy = this.#xy[at + to + 1]! - this.#xy[at + from]!;
    return (xy - (x / n) * y) / xx;
  }

  mean(variant: number, from: number, to: number): number {
    const at = variant * (this.steps + 2);
    return (this.#y[at + to + 1]! - this.#y[at + from]!) / (to - from + 1);
  }

  /** Block jackknife (Tukey 1958): neighbouring references share their path, blocks in time do not. */
  standardError(quantity: (variant: number) => number): number {
    const first = quantity(1);
    let [sum, squares] = [0, 0];
    for (let v = 1; v < this.variants; v++) {
      const d = quantity(v) - first;
      sum += d;
      squares += d * d;
    }
    return Math.sqrt((Math.max(0, squares - (sum * sum) / BLOCKS) * (BLOCKS - 1)) / BLOCKS);
  }

  /** Residual sum of squares of the straight line, and of c + p·ln(step + origin), over from … to. */
  residuals(from: number, to: number, origin: number): { readonly line: number; readonly power: number } {
    const x: number[] = [];
    const logs: number[] = [];
    const y: number[] = [];
    for (let s = from; s <= to; s++) {
      x.push(s);
      logs.push(log(s + origin));
      y.push(this.values[s]!);
    }
    return { line: residual(x, y), power: residual(logs, y) };
  }
}

function residual(x: readonly number[], y: readonly number[]): number {
  const mx = x.reduce((a, b) => a + b, 0) / x.length;
  const my = y.reduce((a, b) => a + b, 0) / y.length;
  let [xx, xy, yy] = [0, 0, 0];
  for (let i = 0; i < x.length; i++) {
    xx += (x[i]! - mx) * (x[i]! - mx);
    xy += (x[i]! - mx) * (y[i]! - my);
    yy += (y[i]! - my) * (y[i]! - my);
  }
  return yy - (xy * xy) / xx;
}
