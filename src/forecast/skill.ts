import { log } from '../base/elementary.ts';

/**
 * Errors under a thousandth of the record's standard deviation count as alike: no tolerance in use is that
 * fine, and on clean records the choice would hang on rounding.
 */
const ALIKE = 1e-3;

/** Root mean square of each column (lead) of row-major origins × leads. */
export function rmsByLead(errors: Float64Array, leads: number): Float64Array {
  const sums = new Float64Array(leads);
  for (let i = 0; i < errors.length; i++) sums[i % leads]! += errors[i]! * errors[i]!;
  return sums.map((s) => Math.sqrt((s * leads) / errors.length));
}

/** Quantiles (0 … 1, the ⌈q·n⌉-th smallest) of |error| at one lead. */
export function absoluteQuantiles(
  errors: Float64Array,
  leads: number,
  lead: number,
  quantiles: readonly number[],
): number[] {
  const n = errors.length / leads;
  const column = new Float64Array(n);
  for (let i = 0; i < n; i++) column[i] = Math.abs(errors[i * leads + lead]!);
  column.sort();
  return quantiles.map((q) => column[Math.min(n - 1, Math.max(0, Math.ceil(q * n) - 1))]!);
}

/**
 * A forecast explains nothing worth having at a lead where its rms error is above this part of the mean's:
 * it would explain less than a fifth of the variance.
 */
export const SATURATED = 0.9;

/**
 * Score by which structures are compared, lower is better: mean over leads of ln rms error, capped at that
 * of the record's mean (1 in scaled units), since no error past saturation can shorten a lead time. Where
 * errors grow exponentially a difference in the score is a difference in lead time at every tolerance
 * alike, and the rms weighs the worst origins, which set a high-confidence bound. It knows no tolerance, so
 * a wider tolerance can never lead to a shorter lead time.
 */
export function score(errors: Float64Array, leads: number): number {
  let sum = 0;
  for (const rms of rmsByLead(errors, leads)) sum += log(Math.min(1, Math.max(rms, ALIKE)));
  return sum / leads;
}

/**
 * Does forecast A beat forecast B on the same origins? Mean difference of squared errors over the leads at
 * which either is better than the record's mean (rms below `SATURATED` · `climatology`), each lead in units
 * of the larger mean square, with its error from `blocks` stretches of time (Diebold & Mariano 1995,
 * J. Bus. Econ. Stat. 13, 253; block means for the dependence).
 * @param at leads compared
 * @param climatology rms error of the mean by lead
 * @returns t-value, negative when A is better; 0 when they are alike or neither is better than the mean
 */
export function compareForecasts(
  a: Float64Array,
  b: Float64Array,
  leads: number,
  at: Int32Array,
  climatology: Float64Array,
  blocks: number,
): number {
  const n = a.length / leads;
  const [ra, rb] = [rmsByLead(a, leads), rmsByLead(b, leads)];
  const columns = [...at]
    .map((lead) => lead - 1)
    .filter((l) => Math.min(ra[l]!, rb[l]!) < SATURATED * climatology[l]!);
  if (columns.length === 0) return 0;
  const weights = columns.map((l) => {
    const larger = Math.max(ra[l]!, rb[l]!, ALIKE);
    return 1 / (larger * larger);
  });
  const means = new Float64Array(blocks);
  for (let k = 0; k < blocks; k++) {
    const from = Math.floor((k * n) / blocks);
    const to = Math.floor(((k + 1) * n) / blocks);
    let sum = 0;
    for (let i = from; i < to; i++) {
      for (let l = 0; l < columns.length; l++) {
        const p = i * leads + columns[l]!;
        sum += (a[p]! * a[p]! - b[p]! * b[p]!) * weights[l]!;
      }
    }
    means[k] = sum / ((to - from) * columns.length);
  }
  const mean = means.reduce((s, x) => s + x, 0) / blocks;
  const variance = means.reduce((s, x) => s + (x - mean) * (x - mean), 0) / (blocks - 1);
  if (mean === 0) return 0;
  const error = Math.sqrt(variance / blocks);
  // Blocks that agree to the last digit are as sure as can be; t stays finite.
  return error > 1e-12 * Math.abs(mean) ? mean / error : mean < 0 ? -1e12 : 1e12;
}

/**
 * First column (of ascending leads) from which the rms error, averaged over `window` columns, is that of the
 * record's mean; −1 when it never is.
 */
export function saturationColumn(
  errors: Float64Array,
  climatology: Float64Array,
  leads: number,
  window: number,
): number {
  const ours = rmsByLead(errors, leads);
  const mean = rmsByLead(climatology, leads);
  for (let l = 0; l < leads; l++) {
    const to = Math.min(leads, l + window);
    let ratio = 0;
    for (let k = l; k < to; k++) ratio += ours[k]! / mean[k]!;
    if (ratio >= SATURATED * (to - l)) return l;
  }
  return -1;
}
