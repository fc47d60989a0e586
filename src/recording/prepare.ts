import { badOption, LeadspanError } from '../base/errors.ts';
import { Fnv64 } from './hash.ts';
import { checkRecording } from './input.ts';
import { latticeStep } from './lattice.ts';
import { judgeQuality } from './quality.ts';
import { onEvenGrid } from './time-axis.ts';
import type { PreparedRecord, Recording, RecordingOptions, Segment } from './types.ts';

/** Variation within this many units in the last place of the largest value is rounding, not signal. */
const ROUNDING_UNITS = 8;

/**
 * Validates a recording and brings it into the form every later stage works on. A record too poor to
 * analyse is not an error: its `quality.problems` say what is wrong.
 *
 * @throws LeadspanError BAD_INPUT for malformed input, naming the field; BAD_OPTION
 */
export function prepareRecording(input: Recording, options: RecordingOptions = {}): PreparedRecord {
  if (options.resample !== undefined && options.resample !== 'linear')
    badOption('resample', "'linear' (or left out)", options.resample);
  if (options.detrend !== undefined && options.detrend !== 'none' && options.detrend !== 'linear')
    badOption('detrend', "'none' or 'linear'", options.detrend);
  const checked = checkRecording(input);
  const even = onEvenGrid(
    checked.channels,
    checked.interval,
    checked.times,
    checked.timeUnit,
    options.resample === 'linear',
  );
  const { interval } = even;
  const channelCount = even.channels.length;
  const count = even.channels[0]!.length;
  if (channelCount * count > 2 ** 31 - 1)
    throw new LeadspanError('BAD_INPUT', 'recording.samples has too many values on its even grid.', {
      field: 'recording.samples',
    });

  const { present, segments, missing } = findSegments(even.channels);
  const treatments = [...even.treatments];
  const scaled = new Float64Array(channelCount * count);
  const means: number[] = [];
  const stds: number[] = [];
  const flatChannels: number[] = [];
  let target: { values: Float64Array; unit: number; constant: boolean; std: number } | undefined;
  for (let c = 0; c < channelCount; c++) {
    const normal = toNormalRange(even.channels[c]!, present);
    const slope = options.detrend === 'linear' ? subtractLine(normal.values, present, count - missing) : 0;
    if (slope !== 0)
      treatments.push(
        `a straight line of slope ${short((slope * normal.unit) / interval)} ${checked.channelUnits[c]}/${checked.timeUnit} was subtracted from channel ${c}`,
      );
    const { mean, std, largest, range } = moments(normal.values, present, count - missing);
    const constant = range <= ROUNDING_UNITS * 2 ** -52 * largest;
    means.push(mean * normal.unit);
    stds.push(constant ? 0 : std * normal.unit);
    if (!constant) {
      const row = scaled.subarray(c * count, (c + 1) * count);
      for (let i = 0; i < count; i++) if (present[i]) row[i] = (normal.values[i]! - mean) / std;
    } else if (c !== checked.target) flatChannels.push(c);
    if (c === checked.target) target = { values: normal.values, unit: normal.unit, constant, std };
  }

  const { values, unit, constant, std } = target!;
  const sorted = gather(values, present, count - missing).sort();
  // The lattice is that of the acquisition: looked for before a line is subtracted or values interpolated.
  const found = (): number => {
    if (options.detrend !== 'linear' && options.resample !== 'linear') return latticeStep(sorted);
    const raw = toNormalRange(checked.channels[checked.target]!, undefined);
    return (latticeStep(raw.values.filter((v) => !Number.isNaN(v)).sort()) * raw.unit) / unit;
  };
  const step = constant ? 0 : checked.resolution !== undefined ? checked.resolution / unit : found();

  return {
    name: checked.name,
    count,
    interval,
    timeUnit: checked.timeUnit,
    channelUnits: checked.channelUnits,
    target: checked.target,
    channelCount,
    scaled,
    present,
    segments,
    means,
    stds,
    missing,
    resolutionStep: checked.resolution ?? step * unit,
    resolutionSource: checked.resolution !== undefined ? 'given' : step > 0 ? 'found' : 'none-found',
    givenNoise: checked.sensorNoise ?? null,
    quality: judgeQuality({ values, present, segments, sorted, std, step, constant, flatChannels }),
    hash: checked.channels
      .reduce((hash, channel) => hash.numbers(channel), new Fnv64())
      .numbers(Float64Array.of(interval))
      .toString(),
    treatments,
  };
}

function findSegments(channels: readonly Float64Array[]) {
  const count = channels[0]!.length;
  const present = new Uint8Array(count).fill(1);
  for (const channel of channels)
    for (let i = 0; i < count; i++) if (Number.isNaN(channel[i])) present[i] = 0;
  const segments: Segment[] = [];
  let missing = 0;
  let start = -1;
  for (let i = 0; i < count; i++) {
    const here = present[i] === 1;
    if (here && start < 0) start = i;
    if (!here) {
      missing++;
      if (start >= 0) segments.push({ start, end: i });
      start = -1;
    }
  }
  if (start >= 0) segments.push({ start, end: count });
  return { present, segments, missing };
}

/**
 * Divides by a power of two that brings the largest value to 1 … 2: exact, and squares of 1e308 neither
 * overflow nor do squares of 1e-200 vanish. `unit` undoes it. (Subnormal values keep what bits they have.)
 */
function toNormalRange(channel: Float64Array, present: Uint8Array | undefined) {
  let largest = 0;
  for (let i = 0; i < channel.length; i++)
    if (present === undefined || present[i]) {
      const a = Math.abs(channel[i]!);
      if (a > largest) largest = a;
    }
  let unit = 1;
  if (largest > 0) {
    // Repeated doubling and halving are exact; at most 1,074 steps.
    while (unit * 2 <= largest && unit < 2 ** 1023) unit *= 2;
    while (unit > largest && unit > 2 ** -1022) unit /= 2;
  }
  const values = new Float64Array(channel.length);
  for (let i = 0; i < channel.length; i++) values[i] = channel[i]! / unit;
  return { values, unit };
}

/** Two passes with the rounding of the first corrected in the second (Chan, Golub & LeVeque 1983, Am. Stat. 37, 242). */
function moments(values: Float64Array, present: Uint8Array, n: number) {
  if (n === 0) return { mean: 0, std: 0, largest: 0, range: 0 };
  let sum = 0;
  let low = Number.POSITIVE_INFINITY;
  let high = Number.NEGATIVE_INFINITY;
  for (let i = 0; i < values.length; i++) {
    if (!present[i]) continue;
    const v = values[i]!;
    sum += v;
    if (v < low) low = v;
    if (v > high) high = v;
  }
  const rough = sum / n;
  let rest = 0;
  let squares = 0;
  for (let i = 0; i < values.length; i++) {
    if (!present[i]) continue;
    const d = values[i]! - rough;
    rest += d;
    squares += d * d;
  }
  const variance = (squares - (rest * rest) / n) / n;
  return {
    mean: rough + rest / n,
    std: Math.sqrt(Math.max(0, variance)),
    largest: Math.max(Math.abs(low), Math.abs(high)),
    range: high - low,
  };
}

/** Least-squares line over the sample number, subtracted in place with the mean kept; returns its slope per sample. */
function subtractLine(values: Float64Array, present: Uint8Array, n: number): number {
  if (n < 2) return 0;
  let middle = 0;
  let mean = 0;
  for (let i = 0; i < values.length; i++)
    if (present[i]) {
      middle += i / n;
      mean += values[i]! / n;
    }
  let products = 0;
  let squares = 0;
  for (let i = 0; i < values.length; i++)
    if (present[i]) {
      products += (i - middle) * (values[i]! - mean);
      squares += (i - middle) * (i - middle);
    }
  const slope = products / squares;
  for (let i = 0; i < values.length; i++) values[i] = values[i]! - slope * (i - middle);
  return slope;
}

function gather(values: Float64Array, present: Uint8Array, n: number): Float64Array {
  const out = new Float64Array(n);
  let k = 0;
  for (let i = 0; i < values.length; i++) if (present[i]) out[k++] = values[i]!;
  return out;
}

const short = (x: number) => String(Number(x.toPrecision(4)));
