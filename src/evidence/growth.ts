import type { Compute } from '../base/compute.ts';
import { defineTask } from '../base/compute.ts';
import { log } from '../base/elementary.ts';
import type { Kernels } from '../base/kernels.ts';
import type { DivergenceResult } from '../divergence/types.ts';
import { forecastErrorTask } from '../forecast/error.ts';
import type { Reconstruction } from '../reconstruct/types.ts';
import type { PreparedRecord } from '../recording/types.ts';
import { type EvidenceLine, neutral, short } from './line.ts';
import { type LocalExponent, type LocalExponentInput, localExponentTask } from './local-exponent.ts';
import { normalScores } from './normal-scores.ts';
import { makeSurrogate, undistorted } from './null-test.ts';
import { forecastShape } from './regular-motion.ts';
import { longestStretch, surrogateStretch } from './stretch.ts';
import { blockMean, isStretching, measureStretching } from './stretching.ts';
import type { Reason } from './types.ts';

/** Surrogates whose growth is compared; none of 9 reaching the record's is p = 0.1, beside the null test's own level. */
const SURROGATES = 9;
/** Numbers beyond those of the null test: independent of it. */
const FIRST_NUMBER = 10_000;
/**
 * Growth over one cycle below which it does not count: e^0.05, a doubling in 14 cycles. Local fits lean by
 * about as much where the motion is regular (exponent 0) and the record shows a few hundred cycles.
 */
const LEAST_PER_CYCLE = 0.05;
/** Where the growth has had time to fill the attractor, forecasts know nothing: an error of the whole spread, and more. */
const SKILL_LOST = 0.75;
/** e-folds given to the growth beyond those from the one-step error to the size of the attractor. */
const SPARE_FOLDS = 2;
/** Steps per block for surrogates: their rates only need to be told from the record's. */
const SURROGATE_STEPS = 25;

export interface Growth extends EvidenceLine {
  readonly verdict: 'exponential' | 'none' | 'like-noise' | 'unknown';
  /** Lower end of the growth in standard errors above zero; 0 where unknown. */
  readonly strength: number;
  /** Growth per dominant cycle (per step of a map). */
  readonly perCycle: number;
}

/** The same exponent of a surrogate, with the record's settings. */
export const surrogateExponentTask = defineTask(
  'evidence.surrogate-exponent',
  function* (
    kernels: Kernels,
    input: LocalExponentInput & { readonly seed: number; readonly number: number },
  ): Generator<number, LocalExponent | undefined, void> {
    const { seed, number, ...shape } = input;
    const series = yield* makeSurrogate(kernels, input.series, seed, number);
    return yield* localExponentTask.run(kernels, { ...shape, series });
  },
);

/**
 * Does the rule behind the record make small differences grow, by an amount that its length makes
 * certain, faster than in linear noise, and do forecasts lose their skill when that growth says so?
 * @param rest spread that is left for irregular motion, in standard deviations
 */
export async function examineGrowth(
  record: PreparedRecord,
  reconstruction: Reconstruction,
  divergence: DivergenceResult,
  rest: number,
  compare: boolean,
  seed: number,
  compute: Compute,
): Promise<Growth> {
  const native = longestStretch(record);
  // Exponents do not depend on the coordinate, but what bends a linear process bends its fits.
  const chosen = undistorted(native);
  const series = chosen.values;
  const [first] = await measureStretching(series, reconstruction, compute);
  if (first === undefined)
    return {
      verdict: 'unknown',
      strength: 0,
      perCycle: 0,
      reasons: [
        neutral(
          'GROWTH_NOT_MEASURED',
          `The longest stretch without gaps (${series.length} samples) is too short to follow differences.`,
        ),
      ],
    };
  const { mean, low, local, shape } = first;
  const cycle = reconstruction.dynamics === 'map' ? 1 : (record.quality.samplesPerCycle ?? 1);
  const perTime = 1 / record.interval;
  let grows = isStretching(first) && mean * cycle > LEAST_PER_CYCLE;
  let bent = false;
  if (grows) {
    const other = chosen.undone ? native : normalScores(native);
    const second = await measureStretching(other, reconstruction, compute);
    // Bounded distributions have no smooth scores at their ends: there the fits miss by more, and may.
    bent = !second.some((s) => s.low > 0);
    grows = !bent;
  }
  const reasons: Reason[] = [
    {
      code: grows ? 'DIFFERENCES_GROW' : 'DIFFERENCES_DO_NOT_GROW',
      text: grows
        ? `Locally fitted maps stretch small differences by ${short(mean * perTime)} (at least ${short(low * perTime)}) e-folds per ${record.timeUnit}, as measured and brought to a normal distribution.`
        : `Locally fitted maps do not stretch small differences for certain${bent ? ' (only in one of two coordinates: as measured, and brought to a normal distribution)' : ''}: ${short(mean * perTime)} (at least ${short(low * perTime)}) e-folds per ${record.timeUnit}, from fits of which ${short(100 * local.supported)} % are supported and that miss by ${short(local.error)} standard deviations.`,
      value: mean * perTime,
      threshold: (LEAST_PER_CYCLE / cycle) * perTime,
      interval: [low * perTime, (2 * mean - low) * perTime],
      speaksFor: grows ? 'chaotic' : 'none',
      assumes: `Fits over ${local.neighbours} neighbours; measurement noise flattens their slopes, so noisy chaos may show no growth. The value judges, it does not measure the exponent.`,
    },
  ];
  if (divergence.largest.ok)
    reasons.push({
      code: 'NEIGHBOURS_DIVERGE',
      text: `Neighbouring states part at ${short(divergence.largest.value)} ${divergence.largest.unit} (${short(divergence.largest.low)} to ${short(divergence.largest.high)}).`,
      value: divergence.largest.value,
      threshold: 0,
      interval: [divergence.largest.low, divergence.largest.high],
      speaksFor: divergence.largest.low > 0 ? 'chaotic' : 'none',
    });
  else reasons.push(neutral('NEIGHBOURS_DO_NOT_DIVERGE', divergence.largest.why));
  const strength = first.standardError > 0 ? mean / first.standardError : 0;
  const result = (verdict: Growth['verdict']): Growth => ({
    verdict,
    strength,
    perCycle: mean * cycle,
    reasons,
  });
  if (!grows || !compare) return result(grows ? 'exponential' : 'none');

  const lost = await skillLost(record, reconstruction, series, mean, local.error, rest, compute);
  reasons.push(lost.reason);
  const rates = await surrogateRates(record, shape, seed, compute);
  const largest = Math.max(...rates);
  const above = rates.length > 0 && mean > largest;
  reasons.push(
    rates.length === 0
      ? neutral('NO_SURROGATES', 'No surrogates could be made to compare the growth with.')
      : {
          code: above ? 'GROWTH_BEYOND_NOISE' : 'GROWTH_LIKE_NOISE',
          text: above
            ? `The same fits on ${rates.length} surrogates of linear noise give at most ${short(largest * perTime)} e-folds per ${record.timeUnit}.`
            : `Surrogates of linear noise seem to stretch differences as much (${short(largest * perTime)} e-folds per ${record.timeUnit}).`,
          value: mean * perTime,
          threshold: largest * perTime,
          speaksFor: above ? 'chaotic' : 'noise',
        },
  );
  return result(!above ? 'like-noise' : lost.lost ? 'exponential' : 'none');
}

async function surrogateRates(
  record: PreparedRecord,
  shape: LocalExponentInput,
  seed: number,
  compute: Compute,
): Promise<number[]> {
  const found = surrogateStretch(record);
  if (found === null) return [];
  const series = undistorted(found.values).values;
  const results = await compute.map(
    surrogateExponentTask,
    Array.from({ length: SURROGATES }, (_, i) => ({
      ...shape,
      series,
      steps: SURROGATE_STEPS,
      seed,
      number: FIRST_NUMBER + i,
    })),
  );
  return results.flatMap((r) => (r === undefined ? [] : [blockMean(r.blocks).mean]));
}

/**
 * Forecast error at the lead at which the growth must have filled the attractor. Motion that only looks
 * stretching in places (strange but not chaotic, several tones) keeps its forecasts.
 */
async function skillLost(
  record: PreparedRecord,
  reconstruction: Reconstruction,
  series: Float64Array,
  rate: number,
  start: number,
  rest: number,
  compute: Compute,
): Promise<{ readonly lost: boolean; readonly reason: Reason }> {
  // An error below a thousandth counts as that: the nearest recorded state is no closer.
  const folds = log(1 / Math.max(1e-3, start)) + SPARE_FOLDS;
  const lead = Math.max(1, Math.min(Math.floor(series.length / 4), Math.ceil(folds / rate)));
  const { error } = await compute.run(forecastErrorTask, { ...forecastShape(series, reconstruction), lead });
  if (error === null)
    return { lost: false, reason: neutral('SKILL_NOT_MEASURED', 'Too few forecasts can be compared.') };
  const lost = error >= SKILL_LOST * rest;
  return {
    lost,
    reason: {
      code: lost ? 'SKILL_FALLS' : 'SKILL_STAYS',
      text: `After ${short(lead * record.interval)} ${record.timeUnit}, when this growth must have used up the forecast, its error is ${short(error)} standard deviations (lines apart, the record spreads over ${short(rest)})${lost ? '' : ': the forecast still knows something, so the growth is not real'}.`,
      value: error,
      threshold: SKILL_LOST * rest,
      speaksFor: lost ? 'chaotic' : 'none',
      assumes: 'Forecasts by the mean of the nearest states.',
    },
  };
}
