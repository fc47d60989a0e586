import { defineTask } from '../base/compute.ts';
import type { DelayVectors, Kernels, NearestNeighbours } from '../base/kernels.ts';
import { evenOrdinals, LIBRARY_CAP, offsetsOf, thin } from './false-neighbours.ts';

export interface CandidateTaskInput {
  readonly data: Float64Array;
  /** Times whose vectors are complete for every candidate and whose target `lead` samples later exists. */
  readonly starts: Int32Array;
  readonly count: number;
  readonly channelCount: number;
  readonly target: number;
  readonly delay: number;
  /** Delays per channel to try, ascending. */
  readonly dimensions: readonly number[];
  readonly lead: number;
  /** Library vectors within this many samples of a query are left out. */
  readonly exclusion: number;
  /** Stop when larger dimensions no longer help. */
  readonly stopEarly: boolean;
}

export interface CandidateErrors {
  readonly delay: number;
  readonly dimension: number;
  /** Squared error of each reference point, in units of the target's variance over the record. */
  readonly squares: Float64Array;
}

/** Reference points: the mean squared error of 600 has a relative standard error of about 6 %. */
const REFERENCE_CAP = 600;
const CHUNK = 100;
/** Tried at this many dimensions in a row without a new best, larger ones are not tried. */
const PATIENCE = 2;
/** Keeps the normal equations solvable on flat neighbourhoods; far below any noise level. */
const RIDGE = 1e-6;

/**
 * Out-of-sample error of locally linear forecasts (Farmer & Sidorowich 1987, Phys. Rev. Lett. 59, 845) for
 * one delay and several dimensions. Every reference point is forecast from a library without the stretch
 * around it: h-block cross-validation (Burman, Chow & Nolan 1994, Biometrika 81, 351).
 */
export const candidateTask = defineTask(
  'reconstruct.candidates',
  function* (kernels: Kernels, input: CandidateTaskInput): Generator<number, CandidateErrors[], void> {
    const { data, count, channelCount, target, delay, dimensions, lead } = input;
    const starts = thin(input.starts, LIBRARY_CAP);
    const references = evenOrdinals(starts.length, REFERENCE_CAP);
    const targetOffset = target * count + lead;
    const out: CandidateErrors[] = [];
    let best = Number.POSITIVE_INFINITY;
    let waited = 0;
    for (let i = 0; i < dimensions.length; i++) {
      const dimension = dimensions[i]!;
      const vectors = { data, starts, offsets: offsetsOf(channelCount, count, dimension, delay) };
      const squares = yield* forecastErrors(
        kernels,
        vectors,
        references,
        targetOffset,
        input.exclusion,
        (done) => (i + done) / dimensions.length,
      );
      out.push({ delay, dimension, squares });
      const error = mean(squares);
      if (error < best) {
        best = error;
        waited = 0;
      } else waited++;
      if (input.stopEarly && waited >= PATIENCE) break;
    }
    return out;
  },
);

function* forecastErrors(
  kernels: Kernels,
  vectors: DelayVectors,
  references: Int32Array,
  targetOffset: number,
  exclusion: number,
  progress: (done: number) => number,
) {
  const m = vectors.offsets.length;
  // The fewest neighbours a linear map can rest on, and four times that, which averages noise: the better counts.
  const most = Math.min(256, Math.max(4, Math.floor(vectors.starts.length / 10)));
  const few = Math.min(most, 2 * (m + 1));
  const many = Math.min(most, 8 * (m + 1));
  const errors = [new Float64Array(references.length), new Float64Array(references.length)];
  const { low, high } = range(vectors, targetOffset);
  const index = kernels.neighbourIndex(vectors, 'euclidean');
  try {
    yield progress(0);
    for (let from = 0; from < references.length; from += CHUNK) {
      const part = references.slice(from, from + CHUNK);
      const queries = kernels.packDelayVectors({ ...vectors, starts: part.map((r) => vectors.starts[r]!) });
      const found = index.nearest(part, many, exclusion);
      [few, many].forEach((k, which) => {
        const { predictions } = kernels.localFits({
          vectors,
          targetOffsets: Int32Array.of(targetOffset),
          queries,
          neighbours: k === many ? found : nearestOf(found, part.length, k),
          order: 1,
          weights: 'tricube',
          ridge: RIDGE,
        });
        for (let i = 0; i < part.length; i++) {
          const truth = vectors.data[vectors.starts[part[i]!]! + targetOffset]!;
          // Outside the range ever seen a linear map extrapolates without bound; nothing at all is the mean, 0.
          const p = predictions[i]!;
          const forecast = Number.isNaN(p) ? 0 : Math.max(low, Math.min(high, p));
          errors[which]![from + i] = (forecast - truth) * (forecast - truth);
        }
      });
      yield progress(from / references.length);
    }
  } finally {
    index.close();
  }
  return mean(errors[0]!) <= mean(errors[1]!) ? errors[0]! : errors[1]!;
}

/** The first k of each query's neighbours. */
function nearestOf(found: NearestNeighbours, queries: number, k: number): NearestNeighbours {
  const indices = new Int32Array(queries * k);
  const distances = new Float64Array(queries * k);
  for (let q = 0; q < queries; q++) {
    indices.set(found.indices.subarray(q * found.k, q * found.k + k), q * k);
    distances.set(found.distances.subarray(q * found.k, q * found.k + k), q * k);
  }
  return { k, indices, distances };
}

function range(vectors: DelayVectors, offset: number) {
  let low = Number.POSITIVE_INFINITY;
  let high = Number.NEGATIVE_INFINITY;
  for (let i = 0; i < vectors.starts.length; i++) {
    const v = vectors.data[vectors.starts[i]! + offset]!;
    if (v < low) low = v;
    if (v > high) high = v;
  }
  return { low, high };
}

export function mean(values: Float64Array): number {
  let sum = 0;
  for (let i = 0; i < values.length; i++) sum += values[i]!;
  return values.length > 0 ? sum / values.length : 0;
}

/** Stretches whose mean differences are taken as independent. */
const BLOCKS = 20;

/** Mean of a − b over the reference points and its standard error from 20 successive stretches. */
export function meanDifference(a: Float64Array, b: Float64Array): { mean: number; error: number } {
  const n = a.length;
  const blocks = Math.min(BLOCKS, n);
  const means = new Float64Array(blocks);
  for (let k = 0; k < blocks; k++) {
    const [from, to] = [Math.floor((k * n) / blocks), Math.floor(((k + 1) * n) / blocks)];
    for (let i = from; i < to; i++) means[k]! += (a[i]! - b[i]!) / (to - from);
  }
  const centre = mean(means);
  let squares = 0;
  for (const value of means) squares += (value - centre) * (value - centre);
  return { mean: centre, error: Math.sqrt(squares / Math.max(1, blocks - 1) / blocks) };
}

/** A 12-bit acquisition over four standard deviations has steps of a thousandth: smaller errors are all perfect. */
const PERFECT = 1e-3 * 1e-3;

/**
 * The smallest dimension whose error is within one standard error of the best (Breiman et al. 1984,
 * Classification and Regression Trees), with paired differences; among equals the smaller error.
 */
export function parsimonious(candidates: readonly CandidateErrors[]): CandidateErrors {
  const best = candidates.reduce((a, b) => (mean(b.squares) < mean(a.squares) ? b : a));
  const near = candidates.filter((c) => {
    if (c === best) return true;
    const { error } = meanDifference(c.squares, best.squares);
    return Math.max(mean(c.squares), PERFECT) - Math.max(mean(best.squares), PERFECT) <= error;
  });
  const smallest = near.reduce((m, c) => Math.min(m, c.dimension), Number.POSITIVE_INFINITY);
  return near
    .filter((c) => c.dimension === smallest)
    .reduce((a, b) => (mean(b.squares) < mean(a.squares) ? b : a));
}
