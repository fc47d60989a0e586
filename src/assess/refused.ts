import type { Refusal } from '../base/answer.ts';
import type { Regime } from '../evidence/types.ts';
import type { LeadTimeResult } from '../forecast/types.ts';
import type { Stationarity } from '../recording/types.ts';

/** Parts of an assessment of a record too poor to reconstruct: every number refused for the same reason. */

export function unknownStationarity(why: string): Stationarity {
  return {
    verdict: 'undecided',
    parts: 0,
    means: [],
    stds: [],
    meanPValue: 1,
    spreadPValue: 1,
    crossErrors: [],
    crossPValue: 1,
    text: `Stationarity was not judged: ${why}`,
  };
}

export function refusedLeadTime(reason: Refusal, tolerance: number, confidence: number): LeadTimeResult {
  return {
    tolerance,
    confidence,
    trusted: reason,
    median: reason,
    now: reason,
    perDecimalDigit: reason,
    limitedBy: 'none-found',
    limitedByText: 'No forecast was possible.',
    predictor: 'none',
    origins: 0,
    curve: [],
    sensorTable: [],
  };
}

export function refusedRegime(reason: Refusal): Regime {
  return {
    call: 'inconclusive',
    // Certain that this record cannot carry a call, whatever the plant does.
    confidence: 1,
    reasons: [
      {
        code: reason.code,
        text: `${reason.why} ${reason.remedy}`,
        value: null,
        threshold: null,
        speaksFor: 'inconclusive',
        ...(reason.parameters ? { parameters: reason.parameters } : {}),
      },
    ],
  };
}
