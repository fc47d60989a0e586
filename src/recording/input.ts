import { badInput, LeadspanError, show } from '../base/errors.ts';
import { nearestName } from '../base/options.ts';
import type { Recording } from './types.ts';

/** Checks what the caller hands in and copies it; nothing here judges whether the record is any good. */

const FIELDS = [
  'samples',
  'interval',
  'unit',
  'timeUnit',
  'name',
  'resolution',
  'sensorNoise',
  'times',
  'target',
  'channelUnits',
] as const satisfies readonly (keyof Recording)[];

/** Indices into all channels laid end to end are 32-bit. */
const MOST_VALUES = 2 ** 31 - 1;

/** The fields of a recording, checked and copied. */
export interface CheckedInput {
  /** One array per channel, equal lengths ≥ 1; NaN where missing. */
  readonly channels: readonly Float64Array[];
  readonly interval: number | undefined;
  readonly times: Float64Array | undefined;
  readonly unit: string;
  readonly timeUnit: string;
  readonly name: string;
  readonly resolution: number | undefined;
  readonly sensorNoise: number | undefined;
  readonly target: number;
  readonly channelUnits: readonly string[];
}

/** @throws LeadspanError BAD_INPUT naming the field (and the index within it) */
export function checkRecording(input: Recording): CheckedInput {
  const fields = checkFields(input);
  const channels = readChannels(fields.samples);
  const target = fields.target ?? 0;
  if (typeof target !== 'number' || !Number.isInteger(target) || target < 0 || target >= channels.length)
    badInput(
      'recording.target',
      channels.length === 1
        ? '0 (the recording has one channel)'
        : `a channel number from 0 to ${channels.length - 1}`,
      target,
    );
  const unit = text(fields.unit, 'unit', '');
  const interval = positive(fields.interval, 'interval', 'a positive number of time units per sample');
  const times = fields.times === undefined ? undefined : readTimes(fields.times, channels[0]!.length);
  if (interval === undefined && times === undefined)
    badInput('recording.interval', 'a positive number of time units per sample (or give times)', undefined);
  return {
    channels,
    interval,
    times,
    unit,
    timeUnit: text(fields.timeUnit, 'timeUnit', 's'),
    name: text(fields.name, 'name', ''),
    resolution: positive(fields.resolution, 'resolution', "a positive number in the samples' unit"),
    sensorNoise: notNegative(fields.sensorNoise, 'sensorNoise'),
    target,
    channelUnits: readUnits(fields.channelUnits, channels.length, unit),
  };
}

function checkFields(input: unknown): Record<keyof Recording, unknown> {
  if (typeof input !== 'object' || input === null || Array.isArray(input) || ArrayBuffer.isView(input))
    badInput('recording', 'an object { samples, interval, … }', input);
  for (const name of Object.keys(input)) {
    if ((FIELDS as readonly string[]).includes(name)) continue;
    const guess = nearestName(name, FIELDS);
    throw new LeadspanError(
      'BAD_INPUT',
      `recording has no field ${JSON.stringify(name)}${guess ? `; did you mean ${JSON.stringify(guess)}?` : '.'} It takes: ${FIELDS.join(', ')}.`,
      { field: `recording.${name}` },
    );
  }
  return input as Record<keyof Recording, unknown>;
}

const TAKES_SAMPLES =
  'numbers (Float64Array, Float32Array, Int16Array or an array), or an array of such channels';

function readChannels(samples: unknown): Float64Array[] {
  const field = 'recording.samples';
  if (isNumbers(samples)) return [copy(samples, field)];
  if (!Array.isArray(samples)) badInput(field, TAKES_SAMPLES, samples);
  if (samples.length === 0) badInput(field, 'at least one sample', samples);
  // The first element decides; a mixture is reported at the first element that does not fit.
  if (!Array.isArray(samples[0]) && !ArrayBuffer.isView(samples[0])) return [copy(samples, field)];
  const channels: Float64Array[] = [];
  for (let c = 0; c < samples.length; c++) {
    const channel: unknown = samples[c];
    if (!Array.isArray(channel) && !isNumbers(channel))
      badInput(`${field}[${c}]`, 'a channel of numbers', channel);
    channels.push(copy(channel, `${field}[${c}]`));
    if (channels[c]!.length !== channels[0]!.length)
      throw new LeadspanError(
        'BAD_INPUT',
        `${field} must have channels of equal length; channel 0 has ${channels[0]!.length} samples and channel ${c} has ${channels[c]!.length}. Mark missing samples with NaN.`,
        { field },
      );
  }
  if (channels.length * channels[0]!.length > MOST_VALUES)
    badInput(field, `at most ${MOST_VALUES} values in all`, channels.length * channels[0]!.length);
  return channels;
}

/** A typed array of numbers, from any realm (not of bigints, not a DataView). */
function isNumbers(value: unknown): value is ArrayLike<number> {
  if (!ArrayBuffer.isView(value)) return false;
  const tag = Object.prototype.toString.call(value);
  return tag !== '[object DataView]' && !tag.startsWith('[object Big');
}

function copy(values: ArrayLike<unknown>, field: string): Float64Array {
  const n = values.length;
  if (n === 0) badInput(field, 'at least one sample', values);
  if (n > MOST_VALUES) badInput(field, `at most ${MOST_VALUES} samples`, n);
  const out = new Float64Array(n);
  for (let i = 0; i < n; i++) {
    const v = values[i];
    if (typeof v !== 'number')
      badInput(
        `${field}[${i}]`,
        'a number (NaN marks a missing sample)',
        v === undefined && !(i in values) ? 'a hole' : v,
      );
    if (v === Number.POSITIVE_INFINITY || v === Number.NEGATIVE_INFINITY)
      badInput(`${field}[${i}]`, 'finite (NaN marks a missing sample)', v);
    out[i] = v;
  }
  return out;
}

function readTimes(times: unknown, count: number): Float64Array {
  const field = 'recording.times';
  if (!Array.isArray(times) && !isNumbers(times))
    badInput(field, 'an array of numbers, one per sample', times);
  if (times.length !== count) badInput(field, `of the samples' length ${count}`, times);
  const out = copy(times, field);
  for (let i = 0; i < count; i++) {
    if (Number.isNaN(out[i])) badInput(`${field}[${i}]`, 'finite (every sample needs its time)', out[i]);
    if (i > 0 && !(out[i]! > out[i - 1]!))
      throw new LeadspanError(
        'BAD_INPUT',
        `${field} must rise from sample to sample; ${field}[${i}] = ${show(out[i])} ${out[i] === out[i - 1] ? 'repeats' : 'comes after'} ${show(out[i - 1])}.`,
        { field: `${field}[${i}]` },
      );
  }
  if (!Number.isFinite(out[count - 1]! - out[0]!)) badInput(field, 'a span that is finite', out[count - 1]);
  return out;
}

function text(value: unknown, name: string, otherwise: string): string {
  if (value === undefined) return otherwise;
  if (typeof value !== 'string') badInput(`recording.${name}`, 'a string', value);
  return value;
}

function positive(value: unknown, name: string, takes: string): number | undefined {
  if (value === undefined) return undefined;
  if (typeof value !== 'number' || !Number.isFinite(value) || value <= 0)
    badInput(`recording.${name}`, takes, value);
  return value;
}

function notNegative(value: unknown, name: string): number | undefined {
  if (value === undefined) return undefined;
  if (typeof value !== 'number' || !Number.isFinite(value) || value < 0)
    badInput(`recording.${name}`, "a number of at least 0 in the samples' unit", value);
  return value;
}

function readUnits(units: unknown, channels: number, unit: string): readonly string[] {
  if (units === undefined) return Array.from({ length: channels }, () => unit);
  const field = 'recording.channelUnits';
  if (!Array.isArray(units)) badInput(field, 'an array of strings, one per channel', units);
  if (units.length !== channels) badInput(field, `of length ${channels}, one unit per channel`, units);
  return units.map((u, c) => (typeof u === 'string' ? u : badInput(`${field}[${c}]`, 'a string', u)));
}
