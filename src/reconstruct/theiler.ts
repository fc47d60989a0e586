import { defineTask } from '../base/compute.ts';
import type { DelayVectors, Kernels } from '../base/kernels.ts';

export interface SeparationTaskInput {
  readonly vectors: DelayVectors;
  /** Largest time separation in samples. */
  readonly farthest: number;
}

export interface SeparationCurve {
  readonly lag: number[];
  /** Median Euclidean distance per coordinate (divided by √m), in standard deviations. */
  readonly median: number[];
}

const REFERENCES = 800;
/** Every lag up to this one, and as many evenly spread beyond. */
const LAGS = 30;

/**
 * Space–time separation (Provenzale, Smith, Vio & Murante 1992, Physica D 58, 31): how far apart states are
 * that are a given time apart. Where the median has reached its long-run level, closeness in time no longer
 * makes states close.
 */
export const separationTask = defineTask(
  'reconstruct.separation',
  function* (
    _kernels: Kernels,
    { vectors, farthest }: SeparationTaskInput,
  ): Generator<number, SeparationCurve, void> {
    const { data, starts, offsets } = vectors;
    const lag: number[] = [];
    const median: number[] = [];
    const skip = Math.max(1, Math.floor(starts.length / REFERENCES));
    const scale = 1 / offsets.length;
    const distances = new Float64Array(Math.ceil(starts.length / skip));
    const stride = Math.max(1, Math.ceil((farthest - LAGS) / LAGS));
    for (let l = 1; l <= farthest; l += l < LAGS ? 1 : stride) {
      let n = 0;
      for (let i = 0; i + l < starts.length; i += skip) {
        // Ordinals are l apart in time exactly when no gap lies between.
        if (starts[i + l]! - starts[i]! !== l) continue;
        let sum = 0;
        for (let d = 0; d < offsets.length; d++) {
          const difference = data[starts[i]! + offsets[d]!]! - data[starts[i + l]! + offsets[d]!]!;
          sum += difference * difference;
        }
        distances[n++] = sum;
      }
      if (n >= 20) {
        const sorted = distances.slice(0, n).sort();
        lag.push(l);
        median.push(Math.sqrt(sorted[n >> 1]! * scale));
      }
      yield l / farthest;
    }
    return { lag, median };
  },
);

/** Share of the long-run level that counts as having reached it. */
const REACHED = 0.95;

/** First lag at which the median distance has reached its long-run level (median over the later half of the lags). */
export function separationLag({ lag, median }: SeparationCurve): number {
  if (lag.length === 0) return 1;
  const half = lag[lag.length - 1]! / 2;
  const later = Float64Array.from(median.filter((_, i) => lag[i]! >= half)).sort();
  const level = later[later.length >> 1]!;
  const reached = median.findIndex((m) => m >= REACHED * level);
  return lag[reached < 0 ? lag.length - 1 : reached]!;
}
