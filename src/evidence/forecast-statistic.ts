import type { Kernels } from '../base/kernels.ts';

/** How the forecast error is measured, the same for the record and its surrogates. */
export interface StatisticShape {
  /** Samples between coordinates. */
  readonly delay: number;
  readonly dimension: number;
  /** Theiler window in samples. */
  readonly window: number;
  /** Samples ahead. */
  readonly lead: number;
}

/** Forecast origins: the error's sampling error is then about 2 %. */
const ORIGINS = 1000;
/** Eight to a coefficient of the largest shape used here (three coordinates and a constant: four). */
const NEIGHBOURS = 24;
/** Holds slopes down where the neighbourhood is a thread and one direction is all rounding. */
const RIDGE = 1e-3;
/** Fewer forecasts than this say nothing about an average error. */
const FEWEST_ORIGINS = 100;
const CHUNK = 100;

/**
 * Root mean square error of out-of-sample forecasts by locally linear maps (Farmer & Sidorowich 1987, Phys.
 * Rev. Lett. 59, 845), relative to the standard deviation. Linear maps, because on a linear process their
 * error is that of the innovations: the mean of the neighbours would also depend on how densely the states
 * lie, in which a short narrow-band record differs from its surrogates by chance.
 */
export function* forecastStatistic(
  kernels: Kernels,
  series: Float64Array,
  shape: StatisticShape,
): Generator<number, number | null, void> {
  const { delay, dimension, lead } = shape;
  const span = (dimension - 1) * delay;
  const exclusion = Math.max(shape.window, span) + lead;
  const count = series.length - span - lead;
  if (count - 2 * exclusion < Math.max(FEWEST_ORIGINS, 2 * NEIGHBOURS)) return null;
  const starts = Int32Array.from({ length: count }, (_, i) => i + span);
  const vectors = {
    data: series,
    starts,
    offsets: Int32Array.from({ length: dimension }, (_, d) => -d * delay),
  };
  let mean = 0;
  for (let t = 0; t < series.length; t++) mean += series[t]! / series.length;
  let variance = 0;
  for (let t = 0; t < series.length; t++)
    variance += ((series[t]! - mean) * (series[t]! - mean)) / series.length;
  if (!(variance > 0)) return null;
  const std = Math.sqrt(variance);

  const origins = Math.min(ORIGINS, count);
  const queries = Int32Array.from({ length: origins }, (_, i) => Math.floor(((i + 0.5) * count) / origins));
  const index = kernels.neighbourIndex(vectors, 'euclidean');
  let squares = 0;
  try {
    yield 0;
    for (let from = 0; from < origins; from += CHUNK) {
      const part = queries.slice(from, from + CHUNK);
      const { predictions } = kernels.localFits({
        vectors,
        targetOffsets: Int32Array.of(lead),
        queries: kernels.packDelayVectors({ ...vectors, starts: part.map((q) => starts[q]!) }),
        neighbours: index.nearest(part, NEIGHBOURS, exclusion),
        order: 1,
        weights: 'tricube',
        ridge: RIDGE,
      });
      for (let i = 0; i < part.length; i++) {
        const truth = series[starts[part[i]!]! + lead]!;
        // A fit that extrapolates beyond three standard deviations is held there.
        const forecast = Math.max(mean - 3 * std, Math.min(mean + 3 * std, predictions[i]!));
        squares += (forecast - truth) * (forecast - truth);
      }
      yield from / origins;
    }
  } finally {
    index.close();
  }
  return Math.sqrt(squares / origins / variance);
}
