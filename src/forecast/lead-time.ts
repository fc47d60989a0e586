import type { Answer } from '../base/answer.ts';
import type { Compute } from '../base/compute.ts';
import type { Reconstruction } from '../reconstruct/types.ts';
import type { PreparedRecord } from '../recording/types.ts';
import { type BoundOptions, medianExit, trustedBound } from './bound.ts';
import { firstExits } from './exits.ts';
import { forecastHeldOut, type HeldOut } from './held-out.ts';
import { findLimits, gainPerDigit } from './limits.ts';
import { trustedNow } from './now.ts';
import { absoluteQuantiles, rmsByLead } from './skill.ts';
import type { LeadPoint, LeadTimeOptions, LeadTimeResult } from './types.ts';

/** Points of the curve at most. */
const CURVE_POINTS = 200;

export type LeadTimeInput = LeadTimeOptions & {
  readonly seed: number;
  /** Estimated sensor noise, the record's unit. */
  readonly noise: Answer;
  /** Largest Lyapunov exponent, 1 / time unit. */
  readonly largest: Answer;
};

/**
 * How far ahead a forecast can be trusted, measured on forecasts from origins the fit has not seen:
 * the time for which at least `confidence` of whole paths stay within the tolerance.
 *
 * The horizon, the predictor's structure and the choice between it and the reference forecasts are made
 * without looking at tolerance or confidence, so a wider tolerance never shortens the lead time.
 */
export async function estimateLeadTime(
  record: PreparedRecord,
  reconstruction: Reconstruction,
  options: LeadTimeInput,
  compute: Compute,
): Promise<LeadTimeResult> {
  const confidence = options.confidence ?? 0.9;
  const std = record.stds[record.target]!;
  const tolerance = options.tolerance ?? 0.5 * std;
  const perDecimalDigit = gainPerDigit(options.largest, record.timeUnit);
  const heldOut = await forecastHeldOut(record, reconstruction, options, compute);
  if ('ok' in heldOut)
    return {
      tolerance,
      confidence,
      trusted: heldOut,
      median: heldOut,
      now: heldOut,
      perDecimalDigit,
      limitedBy: 'record',
      limitedByText: heldOut.why,
      predictor: 'none',
      origins: 0,
      curve: [],
      sensorTable: [],
    };
  const bound = boundOptions(record, tolerance, confidence, options.seed);
  const trusted = trustedBound(record, reconstruction, heldOut, bound);
  const median = medianExit(record, reconstruction, heldOut, bound);
  await compute.breathe();
  const [now, limits] = await Promise.all([
    trusted.ok ? trustedNow(record, reconstruction, heldOut, bound, compute) : trusted,
    findLimits(
      record,
      reconstruction,
      heldOut,
      { trusted, perDecimalDigit, noise: options.noise, ...bound },
      compute,
    ),
  ]);
  return {
    tolerance,
    confidence,
    trusted,
    median,
    now,
    perDecimalDigit: withMeasuredGain(perDecimalDigit, limits.measuredGain),
    limitedBy: limits.limitedBy,
    limitedByText: limits.limitedByText,
    predictor: heldOut.predictor,
    origins: heldOut.origins.length,
    curve: leadCurve(record, heldOut, bound.tolerance),
    sensorTable: limits.sensorTable,
  };
}

/** Tolerance in scaled units and in words. */
export function boundOptions(
  record: PreparedRecord,
  tolerance: number,
  confidence: number,
  seed: number,
): BoundOptions {
  const unit = record.channelUnits[record.target] || 'units';
  return {
    tolerance: tolerance / record.stds[record.target]!,
    toleranceText: `${Number(tolerance.toPrecision(3))} ${unit}`,
    confidence,
    seed,
  };
}

/** The bound gains its own measured amount per digit, often less than the typical path does: say both. */
function withMeasuredGain(answer: Answer, gain: number | null): Answer {
  if (!answer.ok || gain === null) return answer;
  return { ...answer, evidence: { ...answer.evidence, measuredGainOfBound: gain } };
}

/** Error by lead in the record's unit, decimated. */
function leadCurve(record: PreparedRecord, heldOut: HeldOut, tolerance: number): LeadPoint[] {
  const { steps, errors } = heldOut;
  const std = record.stds[record.target]!;
  const exits = firstExits(errors, steps, tolerance);
  const rms = rmsByLead(errors, steps);
  const persistence = rmsByLead(heldOut.persistence, steps);
  const climatology = rmsByLead(heldOut.climatology, steps);
  const linear = rmsByLead(heldOut.linear, steps);
  const stride = Math.ceil(steps / CURVE_POINTS);
  const curve: LeadPoint[] = [];
  for (let lead = 1; lead <= steps; lead += stride) {
    const l = lead - 1;
    const [median, quantile90] = absoluteQuantiles(errors, steps, l, [0.5, 0.9]);
    let within = 0;
    for (const exit of exits) if (exit > lead) within++;
    curve.push({
      lead: lead * record.interval,
      median: median! * std,
      quantile90: quantile90! * std,
      rms: rms[l]! * std,
      persistence: persistence[l]! * std,
      climatology: climatology[l]! * std,
      linear: linear[l]! * std,
      within: within / exits.length,
    });
  }
  return curve;
}
