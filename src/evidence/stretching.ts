import type { Compute } from '../base/compute.ts';
import type { Reconstruction } from '../reconstruct/types.ts';
import { type LocalExponent, type LocalExponentInput, localExponentTask } from './local-exponent.ts';

/** Coordinates at most: fits of more need more neighbours than most records have near. */
const MOST_COORDINATES = 12;
/** Share of local fits that must support a slope at all. */
const LEAST_SUPPORT = 0.5;
/**
 * Fits that miss by this many standard deviations one step ahead leave ln(1 / 0.3) = 1.2 e-folds until
 * nothing is known: less cannot be told from the spreading of errors that noise feeds anew at every step.
 */
const LARGEST_START = 0.3;

/** Stretching by locally fitted maps, per sample. */
export interface Stretching {
  readonly mean: number;
  /** One-sided 99 % lower bound from the spread of the blocks. */
  readonly low: number;
  readonly standardError: number;
  readonly local: LocalExponent;
  readonly shape: LocalExponentInput;
}

/**
 * Local exponents of a series in the reconstruction's dimension and in two coordinates more. The
 * reconstruction takes the smallest dimension that forecasts about as well as the best; under noise slopes
 * are steeper, and nearer the truth, with more. Better forecast first; empty when the series is too short.
 */
export async function measureStretching(
  series: Float64Array,
  reconstruction: Reconstruction,
  compute: Compute,
): Promise<Stretching[]> {
  const shapes = [0, 2].map(
    (more): LocalExponentInput => ({
      series,
      delay: reconstruction.delay.samples,
      dimension: Math.min(MOST_COORDINATES, reconstruction.delaysPerChannel + more),
      window: reconstruction.theilerWindow.samples,
    }),
  );
  const results = await compute.map(localExponentTask, shapes);
  return results
    .flatMap((local, i) => (local === undefined ? [] : [stretchingOf(local, shapes[i]!)]))
    .sort((a, b) => a.local.error - b.local.error);
}

function stretchingOf(local: LocalExponent, shape: LocalExponentInput): Stretching {
  const { mean, standardError } = blockMean(local.blocks);
  const low = mean - student99(local.blocks.length - 1) * standardError;
  return { mean, low, standardError, local, shape };
}

/** Positive for certain, from fits that a neighbourhood supports and that start well enough to show growth. */
export function isStretching({ low, local }: Stretching): boolean {
  return low > 0 && local.supported > LEAST_SUPPORT && local.error < LARGEST_START;
}

export function blockMean(blocks: readonly number[]): {
  readonly mean: number;
  readonly standardError: number;
} {
  const n = blocks.length;
  const mean = blocks.reduce((s, b) => s + b, 0) / n;
  const squares = blocks.reduce((s, b) => s + (b - mean) * (b - mean), 0);
  return { mean, standardError: Math.sqrt(squares / (n - 1) / n) };
}

/** One-sided 99 % quantile of Student's t: expansion about the normal's 2.326 (Abramowitz & Stegun 1964, 26.7.5). */
function student99(freedom: number): number {
  const z = 2.3263478740408408;
  const z3 = z * z * z;
  const z5 = z3 * z * z;
  return z + (z3 + z) / (4 * freedom) + (5 * z5 + 16 * z3 + 3 * z) / (96 * freedom * freedom);
}
