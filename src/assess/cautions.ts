import type { Answer, Caution } from '../base/answer.ts';
import type { LeadTimeResult } from '../forecast/types.ts';
import type { PreparedRecord, Stationarity } from '../recording/types.ts';

/** What the reader of an assessment must be told, most general last. Every entry has a code for translation. */
export function collectCautions(
  record: PreparedRecord,
  stationarity: Stationarity,
  noise: Answer,
  leadTime: LeadTimeResult,
): Caution[] {
  const cautions: Caution[] = [...record.quality.problems];
  if (record.missing > 0)
    cautions.push({
      code: 'GAPS',
      text: `${record.missing} of ${record.count} samples are missing; no step of the analysis bridges a gap.`,
      parameters: { missing: record.missing, count: record.count },
    });
  for (const treatment of record.treatments)
    cautions.push({ code: 'TREATED', text: `Before the analysis: ${treatment}.`, parameters: { treatment } });
  if (stationarity.verdict !== 'stationary')
    cautions.push({
      code: stationarity.verdict === 'drifting' ? 'DRIFTING' : 'STATIONARITY_UNDECIDED',
      text: stationarity.text,
    });
  if (
    noise.ok &&
    record.givenNoise !== null &&
    (record.givenNoise < noise.low || record.givenNoise > noise.high) &&
    noise.bound !== 'upper'
  )
    cautions.push({
      code: 'NOISE_DISAGREES',
      text: `The sensor noise given (${short(record.givenNoise)}) is outside the range found in the record (${short(noise.low)} to ${short(noise.high)}).`,
      parameters: { given: record.givenNoise, low: noise.low, high: noise.high },
    });
  if (leadTime.trusted.ok || leadTime.now.ok)
    cautions.push({
      code: 'SAME_DYNAMICS',
      text: 'The lead time holds only while the plant stays on the dynamics of this record: a new operating point, repair or set-point change needs a new record.',
    });
  cautions.push({
    code: 'NOT_PROTECTIVE',
    text: 'This is not a protective or medical device. Alarms and trips follow the codes that apply (functional safety: IEC 61508 family and local rules) and the judgement of licensed people.',
  });
  return cautions;
}

const short = (x: number) => String(Number(x.toPrecision(3)));
