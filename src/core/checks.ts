import { badInput } from '../base/errors.ts';

/** Largest whole number kernels count in: addresses and ordinals are 32-bit. */
export const MAX_INT32 = 2 ** 31 - 1;

/** By tag rather than `instanceof`, so that arrays of another realm (a frame, a test runner) pass. */
function isArray(value: unknown, type: string): boolean {
  return Object.prototype.toString.call(value) === `[object ${type}]`;
}

export function object(field: string, value: unknown): void {
  if (typeof value !== 'object' || value === null) badInput(field, 'an object', value);
}

export function float64Array(field: string, value: unknown, length?: number): void {
  if (!isArray(value, 'Float64Array')) badInput(field, 'a Float64Array', value);
  hasLength(field, 'Float64Array', value as Float64Array, length);
}

export function int32Array(field: string, value: unknown, length?: number): void {
  if (!isArray(value, 'Int32Array')) badInput(field, 'an Int32Array', value);
  hasLength(field, 'Int32Array', value as Int32Array, length);
}

export function uint8Array(field: string, value: unknown, length?: number): void {
  if (!isArray(value, 'Uint8Array')) badInput(field, 'a Uint8Array', value);
  hasLength(field, 'Uint8Array', value as Uint8Array, length);
}

function hasLength(field: string, type: string, value: ArrayLike<number>, length: number | undefined): void {
  if (length !== undefined && value.length !== length)
    badInput(field, `${type === 'Int32Array' ? 'an' : 'a'} ${type} of length ${length}`, value);
}

export function whole(field: string, value: unknown, low: number, high = MAX_INT32): void {
  if (typeof value !== 'number' || !Number.isInteger(value) || value < low || value > high)
    badInput(field, `a whole number from ${low} to ${high}`, value);
}

export function choice(field: string, value: unknown, of: readonly unknown[]): void {
  if (!of.includes(value)) badInput(field, `one of ${of.join(', ')}`, value);
}

/** A finite number ≥ 0. */
export function notNegative(field: string, value: unknown): void {
  if (typeof value !== 'number' || !(value >= 0) || value === Number.POSITIVE_INFINITY)
    badInput(field, 'a finite number of at least 0', value);
}

/** True when every value is finite: x − x is 0 for those and NaN for the others. */
export function allFinite(values: Float64Array): boolean {
  let sum = 0;
  for (let i = 0; i < values.length; i++) sum += values[i]! - values[i]!;
  return sum === 0;
}

export function finite(field: string, values: Float64Array): void {
  if (allFinite(values)) return;
  const at = values.findIndex((x) => !Number.isFinite(x));
  badInput(`${field}[${at}]`, 'finite', values[at]);
}

/** Every value a whole number in [low, high]. */
export function inRange(field: string, values: Int32Array, low: number, high: number): void {
  for (let i = 0; i < values.length; i++)
    if (values[i]! < low || values[i]! > high)
      badInput(
        `${field}[${i}]`,
        high < low ? 'absent: nothing is indexed' : `from ${low} to ${high}`,
        values[i],
      );
}

/** Compressed rows: from 0 up to `total` without falling. */
export function rowEnds(field: string, starts: Int32Array, total: number): void {
  if (starts.length === 0) badInput(field, 'of length 1 or more', starts);
  if (starts[0] !== 0) badInput(`${field}[0]`, '0', starts[0]);
  for (let i = 1; i < starts.length; i++)
    if (starts[i]! < starts[i - 1]!) badInput(`${field}[${i}]`, `at least ${starts[i - 1]}`, starts[i]);
  const last = starts[starts.length - 1];
  if (last !== total) badInput(`${field}[${starts.length - 1}]`, `${total} (all of them)`, last);
}

export interface Span {
  readonly low: number;
  readonly high: number;
}

/** Smallest and largest value; (0, 0) for none. */
export function span(values: Int32Array): Span {
  if (values.length === 0) return { low: 0, high: 0 };
  let low = values[0]!;
  let high = low;
  for (let i = 1; i < values.length; i++) {
    const x = values[i]!;
    if (x < low) low = x;
    if (x > high) high = x;
  }
  return { low, high };
}

/** 2^a · 3^b · 5^c, what the Fourier kernels take. */
export function isSmooth(n: number): boolean {
  let rest = n;
  for (const p of [2, 3, 5]) while (rest > 1 && rest % p === 0) rest /= p;
  return rest === 1;
}
