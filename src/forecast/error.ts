import { defineTask } from '../base/compute.ts';

/** Input of {@link forecastErrorTask}. Plain data. */
export interface ForecastErrorInput {
  /** One channel. */
  readonly series: Float64Array;
  /** 1 where `series` has a sample; omitted: everywhere. */
  readonly present?: Uint8Array;
  /** Samples between coordinates. */
  readonly delay: number;
  /** Coordinates. */
  readonly dimension: number;
  /** Theiler window in samples: library vectors this near in time, or overlapping the forecast, are left out. */
  readonly window: number;
  /** Samples ahead. */
  readonly lead: number;
  /** Neighbours averaged; default 2·(dimension + 1). */
  readonly neighbours?: number;
  /** Origins at most, spread evenly; default 2,000. */
  readonly references?: number;
}

export interface ForecastErrorOutput {
  /** Root mean square error relative to the standard deviation of the values forecast; null when too few. */
  readonly error: number | null;
  readonly origins: number;
}

/** Origins per slice: about 2 ms of plain JavaScript. */
const SLICE = 128;
/** Fewer forecasts than this say nothing about an average error. */
const FEWEST_ORIGINS = 20;

/**
 * Nonlinear out-of-sample forecast error of a series: locally constant predictor, the mean future of the
 * nearest states (Farmer & Sidorowich 1987, Phys. Rev. Lett. 59, 845; as a surrogate statistic: Schreiber
 * & Schmitz 1997, Phys. Rev. E 55, 5443). Out of sample: no neighbour is nearer in time than the window,
 * nor shares a sample with the origin's past and target.
 */
export const forecastErrorTask = defineTask<ForecastErrorInput, ForecastErrorOutput>(
  'forecast.error',
  function* (kernels, input) {
    const { series, delay, dimension, lead } = input;
    const span = (dimension - 1) * delay;
    const starts = completeStarts(input, span);
    const k = Math.min(input.neighbours ?? 2 * (dimension + 1), 256);
    if (starts.length < Math.max(FEWEST_ORIGINS, k + 1)) return { error: null, origins: 0 };
    const offsets = Int32Array.from({ length: dimension }, (_, d) => -d * delay);
    const vectors = { data: series, starts, offsets };
    const exclusion = Math.max(input.window, span + lead);
    const origins = spread(starts.length, input.references ?? 2_000);

    const index = kernels.neighbourIndex(vectors, 'euclidean');
    const errors: number[] = [];
    const targets: number[] = [];
    try {
      for (let from = 0; from < origins.length; from += SLICE) {
        const queries = origins.subarray(from, from + SLICE);
        const nearest = index.nearest(queries, k, exclusion);
        for (let q = 0; q < queries.length; q++) {
          let sum = 0;
          let found = 0;
          for (let j = q * k; j < (q + 1) * k; j++) {
            const neighbour = nearest.indices[j]!;
            if (neighbour < 0) break;
            sum += series[starts[neighbour]! + lead]!;
            found++;
          }
          // A forecast from fewer neighbours than asked for would be another statistic.
          if (found < k) continue;
          const truth = series[starts[queries[q]!]! + lead]!;
          errors.push(sum / k - truth);
          targets.push(truth);
        }
        yield Math.min(1, (from + SLICE) / origins.length);
      }
    } finally {
      index.close();
    }
    if (errors.length < FEWEST_ORIGINS) return { error: null, origins: errors.length };
    const mean = targets.reduce((s, x) => s + x, 0) / targets.length;
    const variance = targets.reduce((s, x) => s + (x - mean) * (x - mean), 0) / targets.length;
    if (!(variance > 0)) return { error: null, origins: errors.length };
    const square = errors.reduce((s, e) => s + e * e, 0) / errors.length;
    return { error: Math.sqrt(square / variance), origins: errors.length };
  },
);

/** Times of the latest sample of vectors whose past and target lie in one gapless stretch. */
function completeStarts(input: ForecastErrorInput, span: number): Int32Array {
  const { series, present, lead } = input;
  const starts: number[] = [];
  let run = 0;
  for (let t = 0; t < series.length; t++) {
    run = present !== undefined && present[t] === 0 ? 0 : run + 1;
    if (run > span + lead) starts.push(t - lead);
  }
  return Int32Array.from(starts);
}

/** At most `most` ordinals of `count`, evenly spread. */
export function spread(count: number, most: number): Int32Array {
  const n = Math.min(count, most);
  return Int32Array.from({ length: n }, (_, i) => Math.floor(((i + 0.5) * count) / n));
}
