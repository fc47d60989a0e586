import { defineTask } from '../base/compute.ts';
import type { Kernels } from '../base/kernels.ts';
import type { SumsSetup } from './setup.ts';

export interface ReturnsInput extends Pick<SumsSetup, 'series' | 'valid' | 'delay' | 'exclusion'> {
  readonly references: Int32Array;
  readonly dimension: number;
  /** Ascending. */
  readonly radii: Float64Array;
}

const SLICE = 50;

/**
 * By how many different times apart the pairs closer than each radius are: (Σ n)² / Σ n² over the lags, n pairs at a
 * lag. Pairs of a quasiperiodic record come from a handful of near-returns, so however many there are, the correlation
 * sum at small radii shows the few returns and not the set (its slope is then too steep, and no jackknife sees it).
 */
export const returnsTask = defineTask(
  'geometry.returns',
  function* (_kernels: Kernels, input: ReturnsInput): Generator<number, Float64Array, void> {
    const { series, valid, delay, exclusion, references, dimension, radii } = input;
    const starts: number[] = [];
    for (let t = 0; t < valid.length; t++) if (valid[t]) starts.push(t);
    // In order of their first coordinate, so that only a window of them is looked at.
    const order = Int32Array.from(starts).sort((a, b) => series[a]! - series[b]! || a - b);
    const keys = Float64Array.from(order, (t) => series[t]!);
    const largest = radii[radii.length - 1]!;
    yield 0.1;
    const counts = Array.from(radii, () => new Map<number, number>());
    for (let r = 0; r < references.length; r++) {
      const own = references[r]!;
      for (let i = lowerBound(keys, series[own]! - largest); i < order.length; i++) {
        if (keys[i]! >= series[own]! + largest) break;
        const lag = Math.abs(order[i]! - own);
        if (lag <= exclusion) continue;
        let distance = 0;
        for (let d = 0; d < dimension && distance < largest; d++) {
          const difference = Math.abs(series[own + d * delay]! - series[order[i]! + d * delay]!);
          if (difference > distance) distance = difference;
        }
        if (distance >= largest) continue;
        let e = 0;
        while (distance >= radii[e]!) e++;
        counts[e]!.set(lag, (counts[e]!.get(lag) ?? 0) + 1);
      }
      if (r % SLICE === SLICE - 1) yield 0.1 + (0.9 * r) / references.length;
    }
    const total = new Map<number, number>();
    let [pairs, squares] = [0, 0];
    return Float64Array.from(counts, (more) => {
      for (const [lag, n] of more) {
        const before = total.get(lag) ?? 0;
        total.set(lag, before + n);
        pairs += n;
        squares += n * (n + 2 * before);
      }
      return squares > 0 ? (pairs * pairs) / squares : 0;
    });
  },
);

/** First index whose key is above the value. */
function lowerBound(keys: Float64Array, value: number): number {
  let [low, high] = [0, keys.length];
  while (low < high) {
    const middle = (low + high) >> 1;
    if (keys[middle]! > value) high = middle;
    else low = middle + 1;
  }
  return low;
}
