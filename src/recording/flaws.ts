import type { QualityInput } from './quality-input.ts';

/** Samples the sensor did not measure: clipped at the ends of its range, or stuck. */

/** How many samples have exactly the largest (+1) or smallest (−1) value. */
export function extremes(sorted: Float64Array, side: 1 | -1): number {
  const n = sorted.length;
  let count = 1;
  if (side > 0) while (count < n && sorted[n - 1 - count] === sorted[n - 1]) count++;
  else while (count < n && sorted[count] === sorted[0]) count++;
  return count;
}

export interface Clipping {
  /** Share of all samples that are clipped; 0 when none is. */
  readonly share: number;
  readonly ends: string;
  /** Share of samples at a bound of exactly zero, which a count or a rainfall has by nature. */
  readonly zeros: number;
}

export const NO_CLIPPING: Clipping = { share: 0, ends: '', zeros: 0 };

/**
 * A smooth extremum spends time ∝ √δ within δ of it, so a quantiser's outermost level, at most one step
 * wide, holds at most as many samples as the next three together: √1 against √4 − √1. (Every distribution
 * that falls off faster holds fewer.) An end with more is clipped. The next three values that occur are
 * taken: continuous values hardly repeat at all, those of an exactly periodic record all repeat alike.
 */
export function findClipping(sorted: Float64Array, step: number, distinctValues: number): Clipping {
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

export interface Runs {
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
export function runLengths({ values, segments, sorted }: QualityInput): Runs {
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
