import type { PreparedRecord, Stationarity } from '../recording/types.ts';
import type { EvidenceLine } from './line.ts';
import type { Reason } from './types.ts';

/** Conditions of the record under which any call would be about the sensor or the setting, not the dynamics. */
const BLOCKING = new Set(['CONSTANT', 'STUCK', 'SATURATED', 'TOO_SHORT', 'TOO_COARSE']);

export interface Preconditions extends EvidenceLine {
  /** No call can be made whatever else is found. */
  readonly blocked: boolean;
}

/** Is the record long, whole and steady enough for any call? */
export function checkPreconditions(record: PreparedRecord, stationarity: Stationarity): Preconditions {
  const reasons: Reason[] = record.quality.problems
    .filter((problem) => BLOCKING.has(problem.code))
    .map((problem) => ({
      code: problem.code,
      text: problem.text,
      value: null,
      threshold: null,
      speaksFor: 'inconclusive',
      ...(problem.parameters ? { parameters: problem.parameters } : {}),
    }));
  if (stationarity.verdict === 'drifting')
    reasons.push({
      code: 'DRIFTING',
      text: stationarity.text,
      value: Math.min(stationarity.meanPValue, stationarity.spreadPValue, stationarity.crossPValue),
      threshold: null,
      speaksFor: 'inconclusive',
    });
  const blocked = reasons.length > 0;
  if (!blocked)
    reasons.push({
      code: 'RECORD_USABLE',
      text: `No flaw of the record stands in the way of a call. ${stationarity.text}`,
      value: null,
      threshold: null,
      speaksFor: 'none',
    });
  return { blocked, reasons };
}
