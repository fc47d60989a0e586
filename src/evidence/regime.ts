import type { Refusal } from '../base/answer.ts';
import type { Compute } from '../base/compute.ts';
import type { DivergenceResult } from '../divergence/types.ts';
import type { LeadTimeResult } from '../forecast/types.ts';
import type { DimensionResult, NoiseResult } from '../geometry/types.ts';
import type { Reconstruction } from '../reconstruct/types.ts';
import type { PreparedRecord, Stationarity } from '../recording/types.ts';
import { examineGrowth } from './growth.ts';
import { readLinearNull } from './linear-null.ts';
import { countOrdinalPatterns } from './ordinal.ts';
import { checkPreconditions } from './preconditions.ts';
import { findRegularMotion, mostlyLines } from './regular-motion.ts';
import type { NullTestResult, Reason, Regime } from './types.ts';

export interface RegimeInputs {
  readonly record: PreparedRecord;
  readonly reconstruction: Reconstruction;
  readonly stationarity: Stationarity;
  readonly nullTest: NullTestResult | Refusal;
  readonly divergence: DivergenceResult;
  readonly dimension: DimensionResult;
  readonly noise: NoiseResult;
  readonly leadTime: LeadTimeResult;
}

/**
 * The regime call, by one rule over independent lines of evidence:
 *
 * 1. Preconditions fail → `inconclusive`.
 * 2. Sharp lines hold the record and the forecast stays good far ahead → `periodic` or `quasiperiodic`.
 * 3. `chaotic` needs all of: linear noise rejected; exponential growth with an interval above zero, faster
 *    than surrogates show; forecast skill that is there and falls with lead; no contradiction by lines.
 * 4. `noise` needs: linear noise stands, and no exponential growth beyond it.
 * 5. Everything else → `inconclusive`.
 *
 * Being wrong is worse than refusing, so pieces that disagree never outvote each other.
 */
export async function callRegime(
  inputs: RegimeInputs,
  options: { readonly seed: number; readonly surrogates: number },
  compute: Compute,
): Promise<Regime> {
  const { record, reconstruction, stationarity } = inputs;
  const pre = checkPreconditions(record, stationarity);
  const regular = await findRegularMotion(record, inputs.leadTime, compute.part('lines', 0.2));
  const linear = readLinearNull(inputs.nullTest);
  const ordinal = countOrdinalPatterns(record, reconstruction);
  // The costly line is only drawn where it can decide.
  const decides = !pre.blocked && regular.kind === null && linear.verdict === 'rejected';
  const growth = decides
    ? await examineGrowth(
        record,
        reconstruction,
        inputs.divergence,
        inputs.noise,
        inputs.leadTime,
        options.seed,
        compute.part('growth', 0.8),
      )
    : undefined;
  const reasons: Reason[] = [
    ...pre.reasons,
    ...regular.reasons,
    ...linear.reasons,
    ...(growth?.reasons ?? []),
    ...ordinal.reasons,
  ];
  const call = (regime: Regime['call'], confidence: number, verdict: string): Regime => ({
    call: regime,
    confidence,
    reasons: [
      { code: 'VERDICT', text: verdict, value: null, threshold: null, speaksFor: regime },
      ...reasons,
    ],
  });

  if (pre.blocked) return call('inconclusive', 1, 'The record itself stands in the way of a call.');
  if (regular.kind !== null)
    return call(
      regular.kind,
      regularConfidence(regular.lineShare),
      'The motion is regular: sharp lines hold it, and forecasts stay good far ahead.',
    );
  if (linear.verdict === 'unknown')
    return call(
      'inconclusive',
      0.9,
      'Without a surrogate test, noise cannot be ruled out. A longer gapless record would allow it.',
    );
  if (linear.verdict === 'not-rejected')
    return mostlyLines(regular)
      ? call(
          'inconclusive',
          0.7,
          'Sharp lines hold much of the record, but not enough to call it regular, and linear noise is not ruled out. A longer record would sharpen the lines.',
        )
      : call(
          'noise',
          noiseConfidence(inputs.nullTest),
          'Linear random forces explain the record. High-dimensional determinism cannot be told from noise with this many samples.',
        );
  if (growth!.verdict === 'exponential' && growth!.skillFalls && !mostlyLines(regular))
    return call(
      'chaotic',
      chaoticConfidence(inputs, ordinal.missing),
      'Linear noise is ruled out, small differences grow exponentially, and forecasts lose their skill with lead.',
    );
  return call(
    'inconclusive',
    0.7,
    growth!.verdict === 'like-noise'
      ? 'Linear noise is rejected, but small differences grow no faster than in noise. A less noisy or longer record would show which.'
      : 'Linear noise is rejected, but exponential growth was not shown: nonlinear noise, a changing variance or too short a record look like this too.',
  );
}

/**
 * Confidence: the share of right calls meant among calls of this strength. A base for the rule being
 * satisfied at all, raised by margins that do not depend on each other, and never 1.
 */
function chaoticConfidence(
  { nullTest, divergence, dimension, record }: RegimeInputs,
  missingPatterns: number | null,
): number {
  let confidence = 0.8;
  if (!('ok' in nullTest) && nullTest.record < 0.8 * Math.min(...nullTest.surrogates)) confidence += 0.05;
  if (divergence.largest.ok && divergence.largest.low > 0.5 * divergence.largest.value) confidence += 0.04;
  if (dimension.correlation.ok) confidence += 0.04;
  if (missingPatterns !== null && missingPatterns > 0) confidence += 0.02;
  if (record.count >= 5000) confidence += 0.02;
  return Math.round(confidence * 100) / 100;
}

/** A stand of the null is weaker than a rejection: few samples reject nothing. */
function noiseConfidence(test: NullTestResult | Refusal): number {
  return 'ok' in test ? 0.5 : test.pValue > 0.2 ? 0.85 : 0.7;
}

const regularConfidence = (lineShare: number) => (lineShare > 0.97 ? 0.95 : 0.9);
