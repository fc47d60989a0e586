import { defineTask } from '../base/compute.ts';
import type { Kernels } from '../base/kernels.ts';

export interface FalseNeighbourTaskInput {
  readonly data: Float64Array;
  /** Times whose vectors are complete up to `dimensions` + 1 delays. */
  readonly starts: Int32Array;
  readonly count: number;
  readonly channelCount: number;
  readonly target: number;
  readonly delay: number;
  /** Delays per channel 1 … dimensions are judged. */
  readonly dimensions: number;
  readonly exclusion: number;
}

export interface FalseNeighbourCurves {
  /** Delays per channel. */
  readonly dimension: number[];
  /** Share of false neighbours; null where fewer than FEWEST_JUDGED could be judged. */
  readonly fraction: (number | null)[];
  readonly judged: number[];
  /** Cao's E1 and E2 for dimension 1 … dimensions − 1. */
  readonly e1: number[];
  readonly e2: number[];
}

/** Kennel, Brown & Abarbanel 1992 (Phys. Rev. A 45, 3403) find the result unchanged for thresholds 10 … 50. */
const THRESHOLD = 10;
/**
 * A neighbour farther than std / threshold cannot be called false: two unrelated samples are about one
 * standard deviation apart, so its next coordinates never exceed the threshold (Hegger & Kantz 1999,
 * Phys. Rev. E 60, 4970). Distances are in standard deviations.
 */
const JUDGEABLE_DISTANCE = 1 / THRESHOLD;
/** 50 pairs give a share of 5 % with a standard error of 3 %. */
const FEWEST_JUDGED = 50;
/**
 * Caps that keep the cost at N log N with a small constant: 10,000 vectors searched (every n-th beyond), 1,500
 * of them queried: shares are then known to 0.6 % at 5 %.
 */
export const LIBRARY_CAP = 10_000;
const QUERY_CAP = 1_500;
/** Queries between two yields. */
const CHUNK = 250;

export const falseNeighbourTask = defineTask(
  'reconstruct.falseNeighbours',
  function* (
    kernels: Kernels,
    input: FalseNeighbourTaskInput,
  ): Generator<number, FalseNeighbourCurves, void> {
    const { data, count, channelCount, target, delay, dimensions, exclusion } = input;
    const starts = thin(input.starts, LIBRARY_CAP);
    const queries = evenOrdinals(starts.length, QUERY_CAP);
    const dimension: number[] = [];
    const fraction: (number | null)[] = [];
    const judged: number[] = [];
    const expansion: number[] = [];
    const step: number[] = [];
    for (let m = 1; m <= dimensions; m++) {
      const vectors = { data, starts, offsets: offsetsOf(channelCount, count, m, delay) };
      const neighbours = new Int32Array(starts.length).fill(-1);
      const distances = new Float64Array(starts.length).fill(Number.POSITIVE_INFINITY);
      const index = kernels.neighbourIndex(vectors, 'maximum');
      try {
        yield (m - 1) / dimensions;
        for (let from = 0; from < queries.length; from += CHUNK) {
          const part = queries.slice(from, from + CHUNK);
          const found = index.nearest(part, 1, exclusion);
          for (let i = 0; i < part.length; i++) {
            neighbours[part[i]!] = found.indices[i]!;
            distances[part[i]!] = found.distances[i]!;
          }
          yield (m - 1 + from / queries.length) / dimensions;
        }
      } finally {
        index.close();
      }
      const counts = kernels.falseNeighbourCounts({
        vectors,
        neighbours,
        distances,
        nextOffset: target * count - m * delay,
        threshold: THRESHOLD,
        judgeableDistance: JUDGEABLE_DISTANCE,
      });
      dimension.push(m);
      judged.push(counts.judged);
      fraction.push(counts.judged < FEWEST_JUDGED ? null : counts.falseNeighbours / counts.judged);
      expansion.push(counts.pairs > 0 ? counts.expansionSum / counts.pairs : 0);
      step.push(counts.pairs > 0 ? counts.stepSum / counts.pairs : 0);
    }
    // Cao 1997 (Physica D 110, 43): ratios of successive means. An exactly periodic record has no pairs apart.
    const ratio = (a: number, b: number) => (b > 0 ? a / b : 1);
    const pairs = dimension.slice(1);
    return {
      dimension,
      fraction,
      judged,
      e1: pairs.map((_, i) => ratio(expansion[i + 1]!, expansion[i]!)),
      e2: pairs.map((_, i) => ratio(step[i + 1]!, step[i]!)),
    };
  },
);

/** Every n-th element, so that at most `cap` are left. */
export function thin(starts: Int32Array, cap: number): Int32Array {
  const stride = Math.max(1, Math.ceil(starts.length / cap));
  return stride === 1 ? starts : starts.filter((_, i) => i % stride === 0);
}

/** At most `cap` ordinals spread evenly over 0 … n − 1. */
export function evenOrdinals(n: number, cap: number): Int32Array {
  const number = Math.min(n, cap);
  return Int32Array.from({ length: number }, (_, i) => Math.floor((i * n) / number));
}

/** Offsets of `delayVectors`, for tasks that try several shapes. */
export function offsetsOf(
  channelCount: number,
  count: number,
  delaysPerChannel: number,
  delay: number,
): Int32Array {
  return Int32Array.from(
    { length: channelCount * delaysPerChannel },
    (_, i) => Math.floor(i / delaysPerChannel) * count - (i % delaysPerChannel) * delay,
  );
}
