import { type Answer, type Refusal, refusal } from '../base/answer.ts';
import type { DivergenceResult } from '../divergence/types.ts';
import type { NullTestResult } from '../evidence/types.ts';
import type { LeadTimeResult } from '../forecast/types.ts';
import type { DimensionResult } from '../geometry/types.ts';
import type { Stationarity } from '../recording/types.ts';

/**
 * Numbers that contradict the rest of the evidence are not handed out. Each estimator refuses on its own
 * grounds; these rules are the ones that need two estimators at once.
 */

/**
 * METHODS of chaos presume one unchanging rule: a drifting record has neither an exponent nor a dimension.
 * And a growth or a dimension that linear noise would also show is no finding (Theiler et al. 1992).
 */
export function withholdGeometry<T extends Answer>(
  answer: T,
  quantity: string,
  stationarity: Stationarity,
  nullTest: NullTestResult | Refusal,
): T | Refusal {
  if (!answer.ok) return answer;
  const drifting = refuseDrift(quantity, stationarity);
  if (drifting) return drifting;
  if ('ok' in nullTest)
    return refusal(
      nullTest.code,
      `The ${quantity} cannot be told from that of linear noise, because the surrogate test was not possible: ${nullTest.why}`,
      nullTest.remedy,
    );
  if (nullTest.rejected) return answer;
  return refusal(
    'NOT_APPLICABLE',
    `Linear noise explains the record (p = ${nullTest.pValue.toFixed(3)} from ${nullTest.surrogates.length} surrogates), so a ${quantity} would describe the noise, not a rule.`,
    'A longer or less noisy record may reject linear noise; else use a statistical model.',
    { pValue: nullTest.pValue, surrogates: nullTest.surrogates.length },
  );
}

/** The correlation dimension of a periodic record is meaningful although no linear test rejects it. */
export function withholdDimension(
  result: DimensionResult,
  stationarity: Stationarity,
  nullTest: NullTestResult | Refusal,
  regular: boolean,
): DimensionResult {
  if (regular) return result;
  return {
    ...result,
    correlation: withholdGeometry(result.correlation, 'correlation dimension', stationarity, nullTest),
    entropy: withholdGeometry(result.entropy, 'correlation entropy', stationarity, nullTest),
  };
}

export function withholdDivergence(
  result: DivergenceResult,
  stationarity: Stationarity,
  nullTest: NullTestResult | Refusal,
): DivergenceResult {
  return {
    ...result,
    largest: withholdGeometry(result.largest, 'largest Lyapunov exponent', stationarity, nullTest),
  };
}

/** A lead time promises something about data after the record: a drifting record cannot make that promise. */
export function withholdLeadTime(result: LeadTimeResult, stationarity: Stationarity): LeadTimeResult {
  const drifting = refuseDrift('lead time', stationarity);
  if (!drifting) return result;
  const keep = (answer: Answer) => (answer.ok ? drifting : answer);
  return {
    ...result,
    trusted: keep(result.trusted),
    median: keep(result.median),
    now: keep(result.now),
    perDecimalDigit: keep(result.perDecimalDigit),
    sensorTable: [],
  };
}

function refuseDrift(quantity: string, stationarity: Stationarity): Refusal | undefined {
  if (stationarity.verdict !== 'drifting') return undefined;
  return refusal(
    'NONSTATIONARY',
    `The record changes its character while it lasts, so one ${quantity} for the whole would be false. ${stationarity.text}`,
    "Assess a stretch with constant conditions, or remove a slow trend with detrend: 'linear' and look again.",
  );
}
