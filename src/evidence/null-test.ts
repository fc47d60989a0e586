import { type Refusal, refusal } from '../base/answer.ts';
import { type Compute, defineTask } from '../base/compute.ts';
import { createRandom } from '../base/random.ts';
import { forecastErrorTask } from '../forecast/error.ts';
import type { Reconstruction } from '../reconstruct/types.ts';
import type { PreparedRecord } from '../recording/types.ts';
import { matchedStretch } from './stretch.ts';
import type { NullTestOptions, NullTestResult } from './types.ts';

/** One-sided level of the default 39 surrogates: smallest p = 1/40. */
export const NULL_LEVEL = 0.025;
/** Iterations of a surrogate at most; most stop earlier because the ranks no longer change. */
const ITERATIONS = 100;
/** Forecast origins per series: the error's relative sampling error is then about 3 %. */
const ORIGINS = 1000;
/** Largest embedding of the statistic: in more dimensions surrogates and record are equally unpredictable. */
const MOST_COORDINATES = 6;

interface SurrogateErrorInput {
  readonly values: Float64Array;
  /** 0: the record itself. */
  readonly number: number;
  readonly seed: number;
  readonly shape: StatisticShape;
}

/** How the forecast error is measured, the same for record and surrogates. */
export interface StatisticShape {
  readonly delay: number;
  readonly dimension: number;
  readonly window: number;
  readonly lead: number;
  readonly references: number;
}

/** Iterative amplitude-adjusted surrogate number `number` of a stretch (substream of the seed). */
export function* makeSurrogate(
  kernels: Parameters<typeof forecastErrorTask.run>[0],
  values: Float64Array,
  seed: number,
  number: number,
): Generator<number, Float64Array, void> {
  yield 0;
  const permutation = createRandom(seed, number).permutation(values.length);
  return kernels.surrogate({ values, permutation, iterations: ITERATIONS }).values;
}

/** Nonlinear forecast error of the record or of one surrogate. */
export const surrogateErrorTask = defineTask<SurrogateErrorInput, number | null>(
  'evidence.surrogate-error',
  function* (kernels, input) {
    const series =
      input.number === 0
        ? input.values
        : yield* makeSurrogate(kernels, input.values, input.seed, input.number);
    const { error } = yield* forecastErrorTask.run(kernels, { series, ...input.shape });
    return error;
  },
);

/** Shape of the statistic: the record's own reconstruction, one correlation time ahead at most. */
export function statisticShape(reconstruction: Reconstruction): StatisticShape {
  const { delay, delaysPerChannel, theilerWindow, correlationTime } = reconstruction;
  return {
    delay: delay.samples,
    dimension: Math.min(MOST_COORDINATES, Math.max(2, delaysPerChannel)),
    window: theilerWindow.samples,
    // Far enough that linear correlation alone forecasts badly, near enough that determinism still shows.
    lead: Math.max(1, Math.min(delay.samples, correlationTime.samples)),
    references: ORIGINS,
  };
}

/**
 * Surrogate test of the null hypothesis that the record is a stationary linear Gaussian process seen
 * through a static monotone function (Theiler et al. 1992, Physica D 58, 77; Schreiber & Schmitz 1996).
 * Statistic: nonlinear out-of-sample forecast error, the most powerful of several (Schreiber & Schmitz
 * 1997, Phys. Rev. E 55, 5443); one-sided, since determinism makes it small.
 */
export async function nullTest(
  record: PreparedRecord,
  reconstruction: Reconstruction,
  options: NullTestOptions & { readonly seed: number },
  compute: Compute,
): Promise<NullTestResult | Refusal> {
  const surrogates = options.surrogates ?? 39;
  const stretch = matchedStretch(record);
  if (stretch === null || stretch.count < 200)
    return refusal(
      'TOO_SHORT',
      `The longest stretch without gaps has ${stretch?.count ?? 0} usable samples; the surrogate test takes at least 200.`,
      'Record longer, or without gaps.',
      { samples: stretch?.count ?? 0 },
    );
  const from = record.target * record.count + stretch.start;
  const values = record.scaled.slice(from, from + stretch.count);
  const shape = statisticShape(reconstruction);
  const errors = await compute.map(
    surrogateErrorTask,
    Array.from({ length: surrogates + 1 }, (_, number) => ({ values, number, seed: options.seed, shape })),
  );
  const [own, ...others] = errors;
  if (own === null || own === undefined || others.some((e) => e === null))
    return refusal(
      'TOO_SHORT',
      `With ${stretch.count} samples and a decorrelation window of ${shape.window}, too few forecasts can be compared.`,
      'Record longer.',
      { samples: stretch.count },
    );
  const list = others as number[];
  const pValue = (1 + list.filter((e) => e <= own).length) / (surrogates + 1);
  return {
    nullHypothesis: 'a stationary linear Gaussian process seen through a static monotone function',
    statistic: 'nonlinear forecast error, relative to the standard deviation',
    record: own,
    surrogates: list,
    pValue,
    level: NULL_LEVEL,
    rejected: pValue <= NULL_LEVEL,
    method:
      'iterative amplitude-adjusted surrogates (Schreiber & Schmitz 1996), ends matched, one-sided rank test (Theiler et al. 1992)',
    stretch,
  };
}
