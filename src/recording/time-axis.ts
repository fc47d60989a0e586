import { badInput, LeadspanError } from '../base/errors.ts';

/** Samples on an even grid: what every later stage takes for granted. */
export interface EvenSamples {
  readonly channels: readonly Float64Array[];
  readonly interval: number;
  readonly treatments: readonly string[];
}

/** Largest departure of a step between time stamps from a whole number of intervals, in intervals. */
const LARGEST_JITTER = 0.01;
/** A step longer than this many intervals is a gap: something is missing between its ends. */
const GAP_STEP = 1.5;
/** The even grid may be this many times longer than the record before the gap is refused. */
const MOST_GROWTH = 20;

/** Without time stamps the samples are even by declaration. With them the interval is their median step. */
export function onEvenGrid(
  channels: readonly Float64Array[],
  interval: number | undefined,
  times: Float64Array | undefined,
  timeUnit: string,
  resample: boolean,
): EvenSamples {
  if (times === undefined || times.length < 2) {
    if (interval === undefined)
      badInput('recording.interval', 'given when there is only one time stamp', undefined);
    return { channels, interval, treatments: [] };
  }
  const n = times.length;
  const step = medianStep(times);
  // Each step as a whole number of intervals; the interval is then refined over the whole span.
  const grid = new Float64Array(n);
  for (let i = 1; i < n; i++)
    grid[i] = grid[i - 1]! + Math.max(1, Math.round((times[i]! - times[i - 1]!) / step));
  const refined = resample ? step : (times[n - 1]! - times[0]!) / grid[n - 1]!;
  if (interval !== undefined && Math.abs(interval - refined) > LARGEST_JITTER * refined)
    throw new LeadspanError(
      'BAD_INPUT',
      `recording.interval (${interval} ${timeUnit}) contradicts recording.times, whose steps are ${short(refined)} ${timeUnit}. Give one of them.`,
      { field: 'recording.interval' },
    );

  const span = resample ? (times[n - 1]! - times[0]!) / step : grid[n - 1]!;
  if (span + 1 > MOST_GROWTH * n + 1000)
    throw new LeadspanError(
      'BAD_INPUT',
      `recording.times leaves gaps that would make ${Math.round(span + 1)} samples of ${n}. Split the record at its long gaps.`,
      { field: 'recording.times' },
    );
  if (resample) return interpolate(channels, times, step, Math.floor(span + 1e-6) + 1, timeUnit);

  for (let i = 1; i < n; i++) {
    const steps = grid[i]! - grid[i - 1]!;
    const jitter = Math.abs((times[i]! - times[i - 1]!) / refined - steps);
    if (jitter > LARGEST_JITTER)
      throw new LeadspanError(
        'BAD_INPUT',
        `recording.times is uneven: the step to recording.times[${i}] is ${short(times[i]! - times[i - 1]!)} ${timeUnit} where ${short(steps * refined)} is due (${(100 * jitter).toFixed(1)} % of an interval; at most 1 %). Pass resample: 'linear' to interpolate onto an even grid, or give interval instead of times when the stamps are only rounded.`,
        { field: `recording.times[${i}]` },
      );
  }
  const count = grid[n - 1]! + 1;
  const used = interval ?? refined;
  if (count === n) return { channels, interval: used, treatments: [] };
  const spread = channels.map((channel) => {
    const out = new Float64Array(count).fill(Number.NaN);
    for (let i = 0; i < n; i++) out[grid[i]!] = channel[i]!;
    return out;
  });
  return {
    channels: spread,
    interval: used,
    treatments: [`${count - n} time stamps that were left out became missing samples`],
  };
}

function medianStep(times: Float64Array): number {
  const steps = new Float64Array(times.length - 1);
  for (let i = 0; i < steps.length; i++) steps[i] = times[i + 1]! - times[i]!;
  steps.sort();
  return steps[steps.length >> 1]!;
}

/** Linear interpolation between stamps at most GAP_STEP intervals apart; missing elsewhere. */
function interpolate(
  channels: readonly Float64Array[],
  times: Float64Array,
  interval: number,
  count: number,
  timeUnit: string,
): EvenSamples {
  const out = channels.map(() => new Float64Array(count).fill(Number.NaN));
  let missing = 0;
  let i = 0;
  for (let k = 0; k < count; k++) {
    const t = times[0]! + k * interval;
    while (i + 2 < times.length && times[i + 1]! <= t) i++;
    const width = times[i + 1]! - times[i]!;
    // A grid point on a stamp (to rounding of the stamps) takes that sample alone.
    const near = 1e-6 * interval;
    const exact = Math.abs(t - times[i]!) <= near ? i : Math.abs(t - times[i + 1]!) <= near ? i + 1 : -1;
    if (exact < 0 && width > GAP_STEP * interval) {
      missing++;
      continue;
    }
    const share = (t - times[i]!) / width;
    for (let c = 0; c < channels.length; c++) {
      const x = channels[c]!;
      out[c]![k] = exact >= 0 ? x[exact]! : x[i]! * (1 - share) + x[i + 1]! * share;
    }
  }
  return {
    channels: out,
    interval,
    treatments: [
      `samples were interpolated linearly onto an even grid of ${short(interval)} ${timeUnit}${missing > 0 ? `; ${missing} grid points inside gaps are missing samples` : ''}`,
    ],
  };
}

const short = (x: number) => String(Number(x.toPrecision(6)));
