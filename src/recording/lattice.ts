/**
 * The step of the value lattice: an acquisition writes whole multiples of its quantiser's step, so sorted
 * distinct values are whole multiples of one step apart. Continuous values have no such step.
 */

/** Numbers computed from the same decimal step differ by a few units in the last place. */
const ROUNDING_UNITS = 4;
/** Values rounded to a decimal step coarser than the quantiser's show gaps of n and n + 1 common steps. */
const MOST_PARTS = 16;
/** Largest departure from a whole multiple, in steps: chance passes 10 % of gaps, never hundreds in a row. */
const LARGEST_RESIDUAL = 0.05;

/**
 * @param sorted values in ascending order, finite
 * @returns the greatest common step of the distinct values, or 0 when they look continuous
 */
export function latticeStep(sorted: Float64Array): number {
  if (sorted.length < 2) return 0;
  const largest = Math.max(Math.abs(sorted[0]!), Math.abs(sorted[sorted.length - 1]!));
  const exact = distinct(sorted, 0);
  const merged = distinct(sorted, ROUNDING_UNITS * 2 ** -52 * largest);
  // An offset so large that samples sit on neighbouring doubles makes the number format the quantiser.
  const formatLimited = merged.length * 2 < exact.length;
  return formatLimited ? commonStep(exact) : commonStep(merged);
}

function distinct(sorted: Float64Array, tolerance: number): Float64Array {
  const out = new Float64Array(sorted.length);
  out[0] = sorted[0]!;
  let n = 1;
  for (let i = 1; i < sorted.length; i++) if (sorted[i]! - out[n - 1]! > tolerance) out[n++] = sorted[i]!;
  return out.subarray(0, n);
}

function commonStep(values: Float64Array): number {
  let least = Number.POSITIVE_INFINITY;
  for (let i = 1; i < values.length; i++) {
    const gap = values[i]! - values[i - 1]!;
    if (gap < least) least = gap;
  }
  if (!Number.isFinite(least)) return 0;
  // The median of the single-step gaps averages out the rounding of their ends (decimal steps in float32).
  const single: number[] = [];
  for (let i = 1; i < values.length; i++) {
    const gap = values[i]! - values[i - 1]!;
    if (gap < 1.5 * least) single.push(gap);
  }
  const smallest = single.sort((a, b) => a - b)[single.length >> 1]!;
  for (let parts = 1; parts <= MOST_PARTS; parts++) {
    const step = fitStep(values, smallest / parts);
    if (step > 0) return step;
  }
  return 0;
}

/**
 * Counts steps from value to value and refines the step over the distance gone (its relative error falls as
 * 1 / steps, so long gaps late in the list are still judged); 0 as soon as one gap does not fit.
 */
function fitStep(values: Float64Array, guess: number): number {
  const first = values[0]!;
  let step = guess;
  let steps = 0;
  for (let i = 1; i < values.length; i++) {
    const gap = (values[i]! - values[i - 1]!) / step;
    const whole = Math.round(gap);
    if (whole < 1 || Math.abs(gap - whole) > LARGEST_RESIDUAL) return 0;
    steps += whole;
    const refined = (values[i]! - first) / steps;
    if (Math.abs(refined - guess) > LARGEST_RESIDUAL * guess) return 0;
    step = refined;
  }
  return step;
}
