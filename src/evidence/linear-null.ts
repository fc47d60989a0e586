import type { Refusal } from '../base/answer.ts';
import { type EvidenceLine, neutral, short } from './line.ts';
import type { NullTestResult } from './types.ts';

export interface LinearNull extends EvidenceLine {
  readonly verdict: 'rejected' | 'not-rejected' | 'unknown';
  /** Time has a direction in the record, as no linear Gaussian process through a static function has. */
  readonly directed: boolean;
}

/** Two-sided level of the direction of time: the smallest that 39 surrogates can show. */
const DIRECTION_LEVEL = 0.05;

/** The surrogate test as a line of evidence. */
export function readLinearNull(test: NullTestResult | Refusal): LinearNull {
  if ('ok' in test)
    return { verdict: 'unknown', directed: false, reasons: [neutral('NULL_TEST_REFUSED', test.why)] };
  const smallest = Math.min(...test.surrogates);
  const directed = test.asymmetry.pValue <= DIRECTION_LEVEL;
  return {
    directed,
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
      {
        code: directed ? 'TIME_HAS_DIRECTION' : 'TIME_HAS_NO_DIRECTION',
        text: directed
          ? `Rises and falls differ (skewness of differences ${short(test.asymmetry.record)}, p = ${short(test.asymmetry.pValue)}): no linear process does that, whatever the sensor's scale.`
          : `Rises and falls look alike (skewness of differences ${short(test.asymmetry.record)}, p = ${short(test.asymmetry.pValue)}), as in linear noise.`,
        value: test.asymmetry.pValue,
        threshold: DIRECTION_LEVEL,
        speaksFor: 'none',
      },
    ],
  };
}
