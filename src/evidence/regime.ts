import type { Refusal } from '../base/answer.ts';
import type { Compute } from '../base/compute.ts';
import type { DivergenceResult } from '../divergence/types.ts';
import type { LeadTimeResult } from '../forecast/types.ts';
import type { DimensionResult, NoiseResult } from '../geometry/types.ts';
import type { Reconstruction } from '../reconstruct/types.ts';
import type { PreparedRecord, Stationarity } from '../recording/types.ts';
import { type Decision, decide } from './decide.ts';
import { examineGrowth } from './growth.ts';
import { readLinearNull } from './linear-null.ts';
import { countOrdinalPatterns } from './ordinal.ts';
import { checkPreconditions } from './preconditions.ts';
import { findRegularMotion } from './regular-motion.ts';
import type { NullTestResult, Regime } from './types.ts';

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
 * Correlation times from which a null that stands means something: a hundred forecasts that share nothing,
 * as the statistic itself asks for.
 */
const SETTLED = 100;

/** The regime call: every line of evidence, and the rule of `decide.ts` over them. */
export async function callRegime(
  inputs: RegimeInputs,
  options: { readonly seed: number; readonly surrogates: number },
  compute: Compute,
): Promise<Regime> {
  const { record, reconstruction } = inputs;
  const { seed } = options;
  const pre = checkPreconditions(record, inputs.stationarity);
  const linear = readLinearNull(inputs.nullTest);
  const ordinal = countOrdinalPatterns(record, reconstruction);
  const regular = await findRegularMotion(record, reconstruction, seed, compute.part('lines', 0.3));
  // Surrogates of the growth are only drawn where they can decide.
  const compare = !pre.blocked && regular.kind === null && linear.verdict === 'rejected';
  const growth = await examineGrowth(
    record,
    reconstruction,
    inputs.divergence,
    regular.rest,
    compare,
    seed,
    compute.part('growth', 0.7),
  );
  const decision: Decision = decide({
    pre,
    regular,
    linear,
    growth,
    ordinal,
    test: inputs.nullTest,
    divergence: inputs.divergence,
    dimension: inputs.dimension,
    count: record.count,
    settled: record.count >= SETTLED * reconstruction.correlationTime.samples,
  });
  return {
    call: decision.call,
    confidence: decision.confidence,
    reasons: [
      { code: decision.code, text: decision.text, value: null, threshold: null, speaksFor: decision.call },
      ...pre.reasons,
      ...regular.reasons,
      ...linear.reasons,
      ...growth.reasons,
      ...ordinal.reasons,
    ],
  };
}
