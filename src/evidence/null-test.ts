import { type Refusal, refusal } from '../base/answer.ts';
import { type Compute, defineTask } from '../base/compute.ts';
import type { Kernels } from '../base/kernels.ts';
import { createRandom } from '../base/random.ts';
import type { Reconstruction } from '../reconstruct/types.ts';
import { amplitudeAdjustedSurrogate } from '../recording/surrogate.ts';
import type { PreparedRecord } from '../recording/types.ts';
import { forecastStatistic, type StatisticShape } from './forecast-statistic.ts';
import { normalScores } from './normal-scores.ts';
import { surrogateStretch } from './stretch.ts';
import type { NullTestOptions, NullTestResult } from './types.ts';

/** One-sided level of the default 39 surrogates: smallest p = 1/40. Fewer can only reject at 1/(n + 1). */
export const NULL_LEVEL = 0.025;
export const DEFAULT_SURROGATES = 39;
/** Iterations of a surrogate at most; the forecast error moves by less than a thousandth of itself after twenty. */
const ITERATIONS = 50;
/** Fewer samples leave fewer than a hundred forecasts that share nothing with their neighbours. */
const FEWEST_SAMPLES = 200;
/** Coordinates of the statistic: enough for a plane and the direction of motion through it. */
const COORDINATES = 3;

/** Iterative amplitude-adjusted surrogate number `number` ≥ 1 of a stretch: its own substream of the seed. */
export function* makeSurrogate(
  kernels: Kernels,
  values: Float64Array,
  seed: number,
  number: number,
): Generator<number, Float64Array, void> {
  const permutation = createRandom(seed, number).permutation(values.length);
  return yield* amplitudeAdjustedSurrogate(kernels, values, permutation, ITERATIONS);
}

export interface SurrogateErrorInput {
  readonly values: Float64Array;
  /** 0: the record itself. */
  readonly number: number;
  readonly seed: number;
  readonly shape: StatisticShape;
}

export interface SurrogateStatistics {
  /** Nonlinear forecast error; null when too few forecasts can be made. */
  readonly error: number | null;
  readonly asymmetry: number;
}

/** Both statistics of the record or of one surrogate. */
export const surrogateErrorTask = defineTask(
  'evidence.surrogate-error',
  function* (kernels: Kernels, input: SurrogateErrorInput): Generator<number, SurrogateStatistics, void> {
    const { values, number, seed, shape } = input;
    const series = number === 0 ? values : yield* makeSurrogate(kernels, values, seed, number);
    yield 0.5;
    const error = yield* forecastStatistic(kernels, series, shape);
    return { error, asymmetry: timeAsymmetry(series, shape.lead) };
  },
);

/**
 * Skewness of the differences over `lag` samples. A linear Gaussian process seen through any static function
 * looks the same in both directions of time, so it is zero but for chance (Weiss 1975, J. Appl. Prob. 12, 831;
 * Diks et al. 1995, Phys. Lett. A 201, 221).
 */
export function timeAsymmetry(series: Float64Array, lag: number): number {
  let square = 0;
  let cube = 0;
  const n = series.length - lag;
  for (let t = 0; t < n; t++) {
    const d = series[t + lag]! - series[t]!;
    square += (d * d) / n;
    cube += (d * d * d) / n;
  }
  return square > 0 ? cube / (square * Math.sqrt(square)) : 0;
}

/**
 * Shape of the statistic. It may depend on what record and surrogates have in common, the autocorrelation,
 * and on nothing else: a shape chosen for the record's own forecast would favour the record. Half a
 * correlation time between coordinates, and as far ahead: there linear correlation alone forecasts badly.
 */
export function statisticShape({ correlationTime }: Pick<Reconstruction, 'correlationTime'>): StatisticShape {
  const half = Math.max(1, Math.round(correlationTime.samples / 2));
  return {
    delay: half,
    dimension: COORDINATES,
    window: Math.max(correlationTime.samples, (COORDINATES - 1) * half),
    lead: half,
  };
}

/** Beyond these the distribution is taken to be a distortion: a Gaussian record of 30 independent values has them by chance in 1 of 20. */
const SKEWED = 0.7;
const LONG_TAILED = 1.5;

/**
 * Surrogates keep the spectrum of what they are made from, so a distorted Gaussian process must have its
 * distortion undone first (Theiler et al. 1992): the spectrum of the distorted values is not one that any
 * Gaussian process seen through the same function has (Kugiumtzis 1999, Phys. Rev. E 60, 2808). But a
 * distribution with short tails is also what few cycles of an undistorted narrow-band process show, and
 * undoing what is not there would distort it. Both cases share the distribution with their surrogates,
 * so the choice favours neither.
 */
export function undistorted(values: Float64Array): {
  readonly values: Float64Array;
  readonly undone: boolean;
} {
  const n = values.length;
  let mean = 0;
  for (let t = 0; t < n; t++) mean += values[t]! / n;
  let [two, three, four] = [0, 0, 0];
  for (let t = 0; t < n; t++) {
    const d = values[t]! - mean;
    two += (d * d) / n;
    three += (d * d * d) / n;
    four += (d * d * d * d) / n;
  }
  const skewness = two > 0 ? three / (two * Math.sqrt(two)) : 0;
  const excess = two > 0 ? four / (two * two) - 3 : 0;
  const undone = Math.abs(skewness) > SKEWED || excess > LONG_TAILED;
  return { values: undone ? normalScores(values) : values, undone };
}

/**
 * Surrogate test of the null hypothesis that the record is a stationary linear Gaussian process seen
 * through a static monotone function (Theiler et al. 1992, Physica D 58, 77; Schreiber & Schmitz 1996, Phys.
 * Rev. Lett. 77, 635). Statistic: nonlinear out-of-sample forecast error, the most powerful of several
 * (Schreiber & Schmitz 1997, Phys. Rev. E 55, 5443); one-sided, since determinism makes it small. Rejection
 * alone is not chaos: changing variance, nonlinear noise and noninvertible distortions reject it too.
 */
export async function nullTest(
  record: PreparedRecord,
  reconstruction: Reconstruction,
  options: NullTestOptions & { readonly seed: number },
  compute: Compute,
): Promise<NullTestResult | Refusal> {
  const surrogates = options.surrogates ?? DEFAULT_SURROGATES;
  const found = surrogateStretch(record);
  if (found === null || found.stretch.count < FEWEST_SAMPLES)
    return refusal(
      'TOO_SHORT',
      `The longest stretch without gaps has ${found?.stretch.count ?? 0} usable samples; the surrogate test takes at least ${FEWEST_SAMPLES}.`,
      'Record longer, or without gaps.',
      { samples: found?.stretch.count ?? 0, needed: FEWEST_SAMPLES },
    );
  const { stretch } = found;
  const { values, undone } = undistorted(found.values);
  const shape = statisticShape(reconstruction);
  const statistics = await compute.map(
    surrogateErrorTask,
    Array.from({ length: surrogates + 1 }, (_, number) => ({ values, number, seed: options.seed, shape })),
  );
  const known = statistics.map(({ error }) => error).filter((error): error is number => error !== null);
  if (known.length < statistics.length)
    return refusal(
      'TOO_SHORT',
      `With ${stretch.count} samples and correlations over ${shape.window} of them, too few independent forecasts can be compared.`,
      'Record longer.',
      { samples: stretch.count, window: shape.window },
    );
  const [own, ...others] = known;
  const pValue = rankPValue(own!, others);
  const level = Math.max(NULL_LEVEL, 1 / (surrogates + 1));
  return {
    nullHypothesis: 'a stationary linear Gaussian process seen through a static monotone function',
    statistic: 'nonlinear forecast error, relative to the standard deviation',
    record: own!,
    surrogates: others,
    pValue,
    level,
    rejected: pValue <= level,
    asymmetry: asymmetryTest(statistics.map(({ asymmetry }) => asymmetry)),
    method: `iterative amplitude-adjusted surrogates (Schreiber & Schmitz 1996)${undone ? ' of the values brought to a normal distribution' : ''}, ends matched, one-sided rank test (Theiler et al. 1992); locally linear forecasts ${shape.lead} samples ahead`,
    stretch,
  };
}

/** Two-sided rank test of the first value against the others. */
function asymmetryTest([own, ...others]: readonly number[]): NullTestResult['asymmetry'] {
  const smaller = rankPValue(own!, others);
  const larger = rankPValue(
    -own!,
    others.map((other) => -other),
  );
  return { record: own!, surrogates: others, pValue: Math.min(1, 2 * Math.min(smaller, larger)) };
}

/** One-sided rank p-value of a small statistic: (1 + surrogates at least as small) / (surrogates + 1). */
export function rankPValue(own: number, others: readonly number[]): number {
  return (1 + others.filter((other) => other <= own).length) / (others.length + 1);
}
