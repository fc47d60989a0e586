import { type Caution, REFUSAL_CODES, type Refusal, type RefusalCode, refusal } from '../base/answer.ts';
import { type Cycles, dominantCycles, meanPeriod } from './cycles.ts';
import { type Clipping, extremes, findClipping, NO_CLIPPING, type Runs, runLengths } from './flaws.ts';
import type { QualityInput } from './quality-input.ts';
import type { PreparedRecord, RecordQuality } from './types.ts';

/** Is the record good enough? Every threshold says what would go wrong beyond it. */

/**
 * Cross-validation and the comparison of parts work on 5 stretches; 40 points in each give an error whose
 * own standard error is 11 % (1/√(2·40)). Fewer cannot tell one state space from another.
 */
export const FEWEST_SAMPLES = 200;
/** 5 stretches of 2 cycles: with less, a stretch does not show what the record repeats. */
export const FEWEST_CYCLES = 10;
/**
 * Share of samples the sensor did not measure (clipped, stuck) beyond which results would be false: with 5
 * coordinates, 1 % of samples spoils 5 % of the delay vectors, the level of the tests made on them.
 */
const MOST_FALSE_SAMPLES = 0.01;
/** Samples at a natural bound of zero are measured, but states there cannot be told apart: a tenth at most. */
const MOST_ZEROS = 0.1;
/** More samples to the period of the mean frequency than this only repeat each other. */
const OVERSAMPLED = 200;
/** Rounding to steps wider than the signal's standard deviation leaves about five levels: distances are then ties. */
const WIDEST_STEP = 1;

export function judgeQuality(input: QualityInput): RecordQuality {
  const { sorted, constant } = input;
  const distinctValues = countDistinct(sorted);
  const runs = runLengths(input);
  const cycles = constant ? { count: 0, samples: 0 } : dominantCycles(input);
  const samplesPerCycle = cycles.count > 0 ? cycles.samples / cycles.count : null;
  const clipping = constant ? NO_CLIPPING : findClipping(sorted, input.step, distinctValues);
  const quality = {
    saturatedFraction: sorted.length === 0 ? 0 : (extremes(sorted, 1) + extremes(sorted, -1)) / sorted.length,
    longestRun: runs.longest,
    distinctValues,
    samplesPerCycle,
  };
  return { ...quality, problems: problemsOf(input, quality, runs, cycles, clipping) };
}

/**
 * The first problem under which no state space should be rebuilt, as a refusal. Problems whose code is a
 * refusal code block; the others are remarks.
 */
export function blockingProblem(record: PreparedRecord): Refusal | undefined {
  const problem = record.quality.problems.find((p) => Object.hasOwn(REFUSAL_CODES, p.code));
  if (problem === undefined) return undefined;
  const code = problem.code as RefusalCode;
  return refusal(code, problem.text, REMEDIES[code] ?? 'Record again.', problem.parameters);
}

const REMEDIES: Partial<Record<RefusalCode, string>> = {
  TOO_SHORT: 'Record longer.',
  CONSTANT: 'Check that the right channel was read and that the sensor is alive.',
  STUCK: 'Mark the stuck stretch as missing (NaN), or assess the stretch before it.',
  SATURATED: 'Widen the range of the acquisition and record again, or mark clipped samples as missing (NaN).',
  NOISE_FLOOR: 'Record with a finer resolution or a higher gain.',
};

function problemsOf(
  input: QualityInput,
  quality: Omit<RecordQuality, 'problems'>,
  runs: Runs,
  cycles: Cycles,
  clipping: Clipping,
): Caution[] {
  const problems: Caution[] = [];
  const add = (code: string, text: string, parameters: Caution['parameters'] = {}) =>
    problems.push({ code, text, parameters });
  const n = input.sorted.length;
  if (n < FEWEST_SAMPLES)
    add(
      'TOO_SHORT',
      `The record has ${n} samples; at least ${FEWEST_SAMPLES} are needed to compare forecasts on parts of it.`,
      {
        count: n,
        needed: FEWEST_SAMPLES,
      },
    );
  if (input.constant && n > 0)
    add('CONSTANT', 'The record does not vary beyond the rounding of its numbers.', { count: n });
  if (input.flatChannels.length > 0)
    add('CHANNEL_CONSTANT', `Channel ${input.flatChannels.join(', ')} does not vary and adds nothing.`, {
      channels: input.flatChannels.join(', '),
    });
  if (input.constant || n === 0) return problems;

  if (cycles.count < FEWEST_CYCLES && n >= FEWEST_SAMPLES)
    add(
      'TOO_SHORT',
      `The record shows ${cycles.count} complete ${cycles.count === 1 ? 'cycle' : 'cycles'}; at least ${FEWEST_CYCLES} are needed to see what repeats.`,
      { cycles: cycles.count, needed: FEWEST_CYCLES },
    );
  const stuckShare = runs.stuck / n;
  if (runs.stuck > 0)
    add(
      stuckShare > MOST_FALSE_SAMPLES ? 'STUCK' : 'STUCK_BRIEFLY',
      `The sensor repeats one value for ${runs.longest} samples on end, where its runs are usually at most ${runs.usual} samples; ${percent(stuckShare)} of the record is stuck.`,
      { longest: runs.longest, usual: runs.usual, share: stuckShare },
    );
  if (clipping.share > 0)
    add(
      clipping.share > MOST_FALSE_SAMPLES ? 'SATURATED' : 'CLIPPED_BRIEFLY',
      `${percent(clipping.share)} of the samples sit exactly at the ${clipping.ends} of the range, more than the values next to it and the resolution explain: the record is clipped.`,
      { share: clipping.share, ends: clipping.ends },
    );
  if (clipping.zeros > 0)
    add(
      clipping.zeros > MOST_ZEROS ? 'SATURATED' : 'BOUNDED_BY_ZERO',
      `${percent(clipping.zeros)} of the samples are exactly 0, the end of the range: states there cannot be told apart, whether the quantity is bounded by nature or the record is clipped.`,
      { share: clipping.zeros },
    );
  if (input.step > WIDEST_STEP * input.std)
    add(
      'NOISE_FLOOR',
      `The values come in steps of ${(input.step / input.std).toPrecision(3)} standard deviations (${quality.distinctValues} distinct values): rounding hides the small distances.`,
      { steps: input.step / input.std, distinct: quality.distinctValues },
    );
  const period = meanPeriod(input);
  if (period > OVERSAMPLED)
    add(
      'OVERSAMPLED',
      `The record changes so little from sample to sample that its mean frequency has a period of ${Math.round(period)} samples: most repeat their neighbours, so it carries less than its length suggests.`,
      { period },
    );
  return problems;
}

const percent = (share: number) => `${Number((100 * share).toPrecision(2))} %`;

function countDistinct(sorted: Float64Array): number {
  let n = sorted.length > 0 ? 1 : 0;
  for (let i = 1; i < sorted.length; i++) if (sorted[i] !== sorted[i - 1]) n++;
  return n;
}
