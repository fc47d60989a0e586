import { type Caution, REFUSAL_CODES, type Refusal, type RefusalCode, refusal } from '../base/answer.ts';
import type { PreparedRecord, RecordQuality, Segment } from './types.ts';

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
/** More samples per cycle than this only repeat each other. */
const OVERSAMPLED = 200;
/** Rounding to steps wider than the signal's standard deviation leaves about five levels: distances are then ties. */
const WIDEST_STEP = 1;

interface QualityInput {
  /** The target, in units where nothing overflows (see `prepareRecording`); read where `present`. */
  readonly values: Float64Array;
  readonly present: Uint8Array;
  readonly segments: readonly Segment[];
  /** Present values, ascending. */
  readonly sorted: Float64Array;
  readonly std: number;
  /** Step of the value lattice in the same units, 0 when none. */
  readonly step: number;
  readonly constant: boolean;
  readonly flatChannels: readonly number[];
}

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
  if (quality.samplesPerCycle !== null && quality.samplesPerCycle > OVERSAMPLED)
    add(
      'OVERSAMPLED',
      `The record has ${Math.round(quality.samplesPerCycle)} samples per cycle: most repeat their neighbours, so it carries less than its length suggests.`,
      { samplesPerCycle: quality.samplesPerCycle },
    );
  return problems;
}

const percent = (share: number) => `${Number((100 * share).toPrecision(2))} %`;

function countDistinct(sorted: Float64Array): number {
  let n = sorted.length > 0 ? 1 : 0;
  for (let i = 1; i < sorted.length; i++) if (sorted[i] !== sorted[i - 1]) n++;
  return n;
}

/** How many samples have exactly the largest (+1) or smallest (−1) value. */
function extremes(sorted: Float64Array, side: 1 | -1): number {
  const n = sorted.length;
  let count = 1;
  if (side > 0) while (count < n && sorted[n - 1 - count] === sorted[n - 1]) count++;
  else while (count < n && sorted[count] === sorted[0]) count++;
  return count;
}

interface Clipping {
  /** Share of all samples that are clipped; 0 when none is. */
  readonly share: number;
  readonly ends: string;
  /** Share of samples at a bound of exactly zero, which a count or a rainfall has by nature. */
  readonly zeros: number;
}

const NO_CLIPPING: Clipping = { share: 0, ends: '', zeros: 0 };

/**
 * A smooth extremum spends time ∝ √δ within δ of it, so a quantiser's outermost level, at most one step
 * wide, holds at most as many samples as the next three together: √1 against √4 − √1. (Every distribution
 * that falls off faster holds fewer.) An end with more is clipped. The next three values that occur are
 * taken: continuous values hardly repeat at all, those of an exactly periodic record all repeat alike.
 */
function findClipping(sorted: Float64Array, step: number, distinctValues: number): Clipping {
  const n = sorted.length;
  // With so few levels the next three are the whole range: nothing can be told.
  if (distinctValues < 8) return NO_CLIPPING;
  // Repetitions of a computed value differ by rounding.
  const rounding = 16 * 2 ** -52 * Math.max(Math.abs(sorted[0]!), Math.abs(sorted[n - 1]!));
  const same = step > 0 ? Math.min(rounding, step / 2) : rounding;
  let share = 0;
  let zeros = 0;
  const ends: string[] = [];
  for (const side of [1, -1] as const) {
    const outermost = extremes(sorted, side);
    if (outermost < 3) continue;
    const fromEnd = (i: number) => (side > 0 ? sorted[n - 1 - i]! : sorted[i]!);
    let next = 0;
    for (let i = outermost, values = 1; i < n; i++) {
      if (i > outermost && Math.abs(fromEnd(i) - fromEnd(i - 1)) > same && ++values > 3) break;
      next++;
    }
    // A sample each for the ends of a run; on a lattice counts also scatter: three standard errors of a difference.
    const margin = step > 0 ? 3 * Math.sqrt(outermost + next) + 2 : 2;
    if (outermost <= next + margin) continue;
    if (fromEnd(0) === 0) {
      zeros = outermost / n;
      continue;
    }
    share += outermost / n;
    ends.push(side > 0 ? 'top' : 'bottom');
  }
  return { share, ends: ends.join(' and the '), zeros };
}

interface Runs {
  readonly longest: number;
  /** Median over 20 stretches of their longest run: what is usual. */
  readonly usual: number;
  /** Samples in runs that mean a stuck sensor. */
  readonly stuck: number;
}

/** Shortest run called stuck, and how many times longer than usual it must be (flat tops differ by less). */
const SHORTEST_STUCK = 20;
const STUCK_RATIO = 10;
const STRETCHES = 20;

/**
 * Equal successive values. Quantised slow signals have runs at every turning point, so a run is only
 * called stuck when it is ten times longer than the usual longest one, or a quarter of the record.
 */
function runLengths({ values, segments, sorted }: QualityInput): Runs {
  const n = sorted.length;
  const longestOf = new Array<number>(STRETCHES).fill(0);
  const long: number[] = [];
  let longest = n > 0 ? 1 : 0;
  const end = segments.length > 0 ? segments[segments.length - 1]!.end : 0;
  for (const segment of segments) {
    let from = segment.start;
    for (let i = segment.start + 1; i <= segment.end; i++) {
      if (i < segment.end && values[i] === values[i - 1]) continue;
      const length = i - from;
      if (length > longest) longest = length;
      // Rest at a bound of zero is judged as such, not as a stuck sensor.
      if (length >= SHORTEST_STUCK && !(values[from] === 0 && (sorted[0] === 0 || sorted[n - 1] === 0)))
        long.push(length);
      // A run belongs to every stretch it touches.
      const last = Math.floor(((i - 1) * STRETCHES) / end);
      for (let s = Math.floor((from * STRETCHES) / end); s <= last; s++)
        if (length > longestOf[s]!) longestOf[s] = length;
      from = i;
    }
  }
  const usual = Math.max(1, longestOf.sort((a, b) => a - b)[STRETCHES >> 1]!);
  let stuck = 0;
  for (const length of long) if (length > STUCK_RATIO * usual || length > n / 4) stuck += length;
  return { longest, usual, stuck };
}

interface Cycles {
  /** From upward crossing to upward crossing. */
  readonly count: number;
  /** Samples between the first and the last of them, gaps left out. */
  readonly samples: number;
}

/** The middle is that of each of 8 stretches: a slow trend must not hide the cycles on top of it. */
const MIDDLES = 8;

/**
 * Cycles by upward crossings of the local median with a dead band of a quarter of the interquartile range
 * to each side, so that noise near the middle is not counted (a Schmitt trigger).
 */
function dominantCycles({ values, present }: QualityInput): Cycles {
  const count = values.length;
  const bands = Array.from({ length: MIDDLES }, (_, s) =>
    deadBand(values, present, Math.floor((s * count) / MIDDLES), Math.floor(((s + 1) * count) / MIDDLES)),
  );
  let crossings = 0;
  let low = false;
  let samples = 0;
  let sinceCrossing = 0;
  for (let i = 0; i < count; i++) {
    // Missing samples take no time: a gap hides as many cycles as samples, to a good approximation.
    if (!present[i]) continue;
    sinceCrossing++;
    const v = values[i]!;
    const band = bands[Math.floor((i * MIDDLES) / count)]!;
    if (v < band.low) low = true;
    else if (low && v > band.high) {
      low = false;
      if (crossings > 0) samples += sinceCrossing;
      crossings++;
      sinceCrossing = 0;
    }
  }
  return { count: Math.max(0, crossings - 1), samples };
}

/** Samples that fix a quartile well enough for a dead band. */
const BAND_SAMPLES = 4096;

function deadBand(values: Float64Array, present: Uint8Array, from: number, to: number) {
  const stride = Math.max(1, Math.floor((to - from) / BAND_SAMPLES));
  const sorted = new Float64Array(Math.ceil((to - from) / stride));
  let n = 0;
  let sum = 0;
  for (let i = from; i < to; i += stride)
    if (present[i]) {
      sorted[n++] = values[i]!;
      sum += values[i]!;
    }
  if (n === 0) return { low: 0, high: 0 };
  const quantiles = sorted.subarray(0, n).sort();
  const quantile = (q: number) => quantiles[Math.floor(q * (n - 1))]!;
  const width = 0.25 * (quantile(0.75) - quantile(0.25));
  if (width > 0) return { low: quantile(0.5) - width, high: quantile(0.5) + width };
  // Spikes on a flat base have no interquartile range: a level between base and spikes does instead.
  return { low: sum / n, high: sum / n };
}
