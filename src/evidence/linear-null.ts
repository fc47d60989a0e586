import type { Refusal } from '../base/answer.ts';
import { type EvidenceLine, neutral, short } from './line.ts';
import type { NullTestResult } from './types.ts';

export interface LinearNull extends EvidenceLine {
  readonly verdict: 'rejected' | 'not-rejected' | 'unknown';
}

/** The surrogate test as a line of evidence. */
export function readLinearNull(test: NullTestResult | Refusal): LinearNull {
  if ('ok' in test) return { verdict: 'unknown', reasons: [neutral('NULL_TEST_REFUSED', test.why)] };
  const smallest = Math.min(...test.surrogates);
  return {
    verdict: test.rejected ? 'rejected' : 'not-rejected',
    reasons: [
      {
        code: test.rejected ? 'LINEAR_NULL_REJECTED' : 'LINEAR_NULL_STANDS',
        text: test.rejected
          ? `The record is more predictable (error ${short(test.record)}) than all but a few of ${test.surrogates.length} surrogates of linear noise (smallest error ${short(smallest)}): p = ${short(test.pValue)}.`
          : `Linear noise with the same spectrum and distribution is as predictable as the record: p = ${short(test.pValue)} from ${test.surrogates.length} surrogates.`,
        value: test.pValue,
        threshold: test.level,
        speaksFor: test.rejected ? 'none' : 'noise',
      },
    ],
  };
}
