import { type Answer, finding, refusal } from '../base/answer.ts';
import type { Reconstruction } from '../reconstruct/types.ts';
import type { PreparedRecord } from '../recording/types.ts';
import { bootstrapRank, conformalRank, firstExits, orderStatistic } from './exits.ts';
import type { HeldOut } from './held-out.ts';

/** Level of the sampling intervals of lead times. */
export const INTERVAL_LEVEL = 0.9;

export const METHOD =
  'conformal lower bound on the first exit of held-out forecast paths (Vovk et al. 2005; Chernozhukov et al. 2018); interval by block bootstrap (Künsch 1989)';

export interface BoundOptions {
  /** Scaled units. */
  readonly tolerance: number;
  /** For messages: tolerance in the record's unit with the unit. */
  readonly toleranceText: string;
  readonly confidence: number;
  readonly seed: number;
}

/**
 * How long at least `confidence` of forecast paths stay within the tolerance, in time units. Refused
 * without enough independent origins, and when the mean of the record would serve as long.
 */
export function trustedBound(
  record: PreparedRecord,
  reconstruction: Reconstruction,
  heldOut: HeldOut,
  options: BoundOptions,
): Answer {
  const lack = withoutSkill(heldOut);
  if (lack) return lack;
  const { confidence, tolerance, seed } = options;
  const { steps, independent } = heldOut;
  const exits = firstExits(heldOut.errors, steps, tolerance);
  const n = exits.length;
  const rank = conformalRank(n, independent, confidence);
  if (rank === 0) return tooFew(independent, confidence, reconstruction.theilerWindow.samples);
  const exit = orderStatistic(exits, rank);
  const kept = exit - 1;
  if (kept < 1)
    return refusal(
      'NO_SKILL',
      `More than ${percent(1 - confidence)} of forecasts are off by more than ${options.toleranceText} within one sample.`,
      'Ask for a wider tolerance or a lower confidence, or sample faster.',
      { confidence, origins: n },
    );
  const mean = orderStatistic(firstExits(heldOut.climatology, steps, tolerance), rank) - 1;
  if (mean >= kept)
    return refusal(
      'NO_SKILL',
      `At a tolerance of ${options.toleranceText} the record's mean stays right as long as any forecast (${mean} samples).`,
      'Ask for a narrower tolerance.',
      { samples: mean, forecastSamples: kept },
    );

  const block = blockLength(exits, heldOut, reconstruction);
  const spread = bootstrapRank(exits, rank, block, INTERVAL_LEVEL, seed, exit);
  let below = 0;
  for (const e of exits) if (e < exit) below++;
  const share = below / n;
  // Origins' worth of independent ones, from the variance of the share that left early.
  const effective =
    spread.shareVariance > 0 && share > 0
      ? Math.min(n, (share * (1 - share)) / spread.shareVariance)
      : independent;
  const censored = exit > steps;
  if (!censored && effective < 1 / (1 - confidence) - 1) return tooFew(effective, confidence, block);
  const evidence = {
    origins: n,
    independentOrigins: independent,
    effectiveOrigins: Math.round(effective),
    rank,
    horizon: steps * record.interval,
    climatologyBound: mean * record.interval,
    predictor: heldOut.predictor,
  };
  return intervalAnswer(kept, spread.low - 1, spread.high - 1, steps, record, censored, evidence);
}

/** Time at which half of the forecast paths have left the tolerance. */
export function medianExit(
  record: PreparedRecord,
  reconstruction: Reconstruction,
  heldOut: HeldOut,
  options: BoundOptions,
): Answer {
  const lack = withoutSkill(heldOut);
  if (lack) return lack;
  const { steps } = heldOut;
  const exits = firstExits(heldOut.errors, steps, options.tolerance);
  const rank = Math.ceil(exits.length / 2);
  const exit = orderStatistic(exits, rank);
  const mean = orderStatistic(firstExits(heldOut.climatology, steps, options.tolerance), rank);
  if (mean >= exit)
    return refusal(
      'NO_SKILL',
      `Half of the forecasts leave a tolerance of ${options.toleranceText} after ${exit} samples, and the record's mean after ${mean}.`,
      'Ask for another tolerance.',
      { samples: mean, forecastSamples: exit },
    );
  const block = blockLength(exits, heldOut, reconstruction);
  const spread = bootstrapRank(exits, rank, block, INTERVAL_LEVEL, options.seed, exit);
  return intervalAnswer(exit, spread.low, spread.high, steps, record, exit > steps, {
    origins: exits.length,
    predictor: heldOut.predictor,
  });
}

/** Finding in time units; a bound that no path left within the horizon holds at least that long. */
export function intervalAnswer(
  value: number,
  low: number,
  high: number,
  steps: number,
  record: PreparedRecord,
  censored: boolean,
  evidence: Readonly<Record<string, number | string | boolean | readonly number[]>>,
): Answer {
  const { interval, timeUnit } = record;
  const common = { level: INTERVAL_LEVEL, unit: timeUnit, method: METHOD };
  if (censored) {
    const least = steps * interval;
    return finding({ value: least, low: least, high: least, bound: 'lower', ...common, evidence });
  }
  return finding({
    value: value * interval,
    low: Math.max(0, Math.min(low, value)) * interval,
    high: Math.min(steps, Math.max(high, value)) * interval,
    ...common,
    // Where resamples reach the horizon, the upper end is at least what is given.
    evidence: { ...evidence, upperEndCensored: high >= steps },
  });
}

export function withoutSkill(heldOut: HeldOut) {
  if (heldOut.spec.kind !== 'climatology') return undefined;
  const best = heldOut.comparisons.reduce((a, b) => (b.t < a.t ? b : a));
  return refusal(
    'NO_SKILL',
    `No forecast beats the record's mean over ${heldOut.steps} samples ahead; the best try is ${best.first} with t = ${best.t.toFixed(1)}, where −2.3 is needed.`,
    'If the plant has a rule, a less noisy, faster or longer record may show it.',
    { horizonSamples: heldOut.steps, t: best.t },
  );
}

export function tooFew(independent: number, confidence: number, window: number) {
  const needed = Math.ceil(1 / (1 - confidence) - 1 - 1e-9);
  return refusal(
    'TOO_SHORT',
    `The record holds ${independent.toFixed(0)} independent forecast origins (one per ${window} samples or less); a bound held by ${percent(confidence)} needs ${needed}.`,
    'Record longer, or ask for a lower confidence.',
    { independent, needed, confidence },
  );
}

export function percent(share: number): string {
  return `${Math.round(share * 1000) / 10} %`;
}

/** Origins that overlap in their paths or lie within the decorrelation window are resampled together. */
function blockLength(exits: Int32Array, heldOut: HeldOut, reconstruction: Reconstruction): number {
  const median = orderStatistic(exits, Math.ceil(exits.length / 2));
  const samples = Math.max(reconstruction.theilerWindow.samples + 1, Math.min(median, heldOut.steps));
  const spacing = heldOut.prepared.starts.length / exits.length;
  // Fewer than ten blocks cannot show a spread.
  return Math.max(1, Math.min(Math.ceil(samples / spacing), Math.floor(exits.length / 10)));
}
