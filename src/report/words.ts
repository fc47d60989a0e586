import type { Assessment } from '../assess/types.ts';
import type { RegimeCall } from '../evidence/types.ts';
import type { LeadTimeLimit } from '../forecast/types.ts';

/** The answers in plain words, shared by the report and the command line. */

export const REGIME_WORDS: Readonly<Record<RegimeCall, string>> = {
  chaotic: 'a deterministic rule that forgets its start (chaotic)',
  periodic: 'regular: one repeating cycle (periodic)',
  quasiperiodic: 'regular: several tones that never repeat together (quasiperiodic)',
  noise: 'noise: linear random forces explain the record',
  inconclusive: 'no call: the record does not settle it (inconclusive)',
};

export const LIMIT_WORDS: Readonly<Record<LeadTimeLimit, string>> = {
  divergence: 'the growth of small differences',
  sensor: 'the sensor',
  model: 'the forecast model',
  record: "the record's length",
  'none-found': 'no limit found',
};

/** One sentence that answers the user's main question. */
export function headline(assessment: Assessment): string {
  const { leadTime, record } = assessment;
  const { trusted } = leadTime;
  if (!trusted.ok) return `No lead time can be promised: ${trusted.why}`;
  const reach = trusted.bound === 'lower' ? 'at least ' : '';
  const value = trusted.bound === 'lower' ? trusted.low : trusted.value;
  return (
    `A forecast can be trusted for ${reach}${plain(value)} ${record.timeUnit}: over that time, ` +
    `${plain(leadTime.confidence * 100)} of 100 forecasts stay within ${plain(leadTime.tolerance)} ${record.unit || 'units'} of what comes.`
  );
}

const plain = (value: number) => String(Number(value.toPrecision(3)));
