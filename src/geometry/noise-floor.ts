import { log, pow } from '../base/elementary.ts';
import { CORRELATION_EDGES } from '../base/kernels.ts';
import { OCTAVE, octaveSlope } from './curve.ts';
import { errorFunction } from './error-function.ts';
import { type LogSums, STUDENT_90 } from './log-sums.ts';

/** How much the local slope grows per further dimension, from the smallest usable radius upwards. */
interface GrowthPoint {
  /** Lower end of the octave, in standard deviations. */
  readonly radius: number;
  readonly edge: number;
  readonly growth: number;
  readonly error: number;
  /** Dimensions m of the steps m → m + 1 that enter. */
  readonly dimensions: readonly number[];
}

export type FloorEstimate =
  | { readonly kind: 'level'; readonly value: number; readonly low: number; readonly high: number }
  | { readonly kind: 'upper'; readonly high: number }
  | { readonly kind: 'none' };

/** Where slopes grow by less than this per dimension, distances are above the noise: G = 0.05 at 3.7 σ. */
const ABOVE_NOISE = 0.05;
/** A floor is seen when slopes grow by at least this per dimension (noise: 1 far below its level). */
const SEEN = 0.5;
/** Octaves whose growth is known worse than this are left out. */
const LARGEST_ERROR = 0.25;

/**
 * Growth per dimension that Gaussian noise of level σ gives over the octave from r: C_m ∝ erf(r / 2σ)^(m − d), the
 * probability that one more pair of coordinates differs by less than r.
 */
export function noiseGrowth(radius: number, sigma: number): number {
  return (log(errorFunction(radius / sigma)) - log(errorFunction(radius / (2 * sigma)))) / Math.LN2;
}

/** σ / r at which `noiseGrowth` has a given value between 0 and 1 (bisection; it falls with r / σ). */
function levelFor(growth: number): number {
  let [low, high] = [-9, 9];
  for (let i = 0; i < 60; i++) {
    const middle = (low + high) / 2;
    if (noiseGrowth(1, pow(2, middle)) < growth) low = middle;
    else high = middle;
  }
  return pow(2, (low + high) / 2);
}

/**
 * Noise level from how slopes of the correlation sum grow with the embedding below it (Schreiber 1993, Phys. Rev. E
 * 48, R13), in the units of the radii.
 * @param unfolded dimension in which the clean motion is taken to be resolved
 */
export function floorLevel(sums: LogSums, unfolded: number, range: number): FloorEstimate {
  const points = growthPoints(sums, unfolded, range);
  if (points.length < 2) return { kind: 'none' };
  // From the smallest distances up to where the growth has ceased.
  const end = points.findIndex((p) => p.growth < ABOVE_NOISE);
  const below = end < 0 ? points : points.slice(0, end + 1);
  const seen = below.filter((p) => p.growth - p.error > SEEN);
  if (seen.length < 2) {
    // Noise above this would have shown at the smallest distances.
    const first = points[0]!;
    const largest = Math.min(0.98, Math.max(0.02, first.growth) + STUDENT_90 * first.error);
    return { kind: 'upper', high: first.radius * levelFor(largest) };
  }
  const value = bestLevel(below, (p) => p.growth);
  const logs: number[] = [];
  for (let v = 1; v < sums.variants; v++) logs.push(log(bestLevel(below, (p) => growthAt(sums, v, p))));
  const mean = logs.reduce((a, b) => a + b, 0) / logs.length;
  const squares = logs.reduce((a, b) => a + (b - mean) * (b - mean), 0);
  const sampling = 2 * Math.sqrt(((logs.length - 1) / logs.length) * squares);
  // Levels from single octaves where the growth tells most: their spread is what the model does not explain.
  const single = below
    .filter((p) => p.growth > 0.2 && p.growth < 0.8)
    .map((p) => log((p.radius * levelFor(p.growth)) / value));
  const spread = single.length > 0 ? Math.sqrt(single.reduce((a, b) => a + b * b, 0) / single.length) : 0.3;
  const relative = STUDENT_90 * Math.sqrt(sampling * sampling + spread * spread);
  return { kind: 'level', value, low: value / (1 + relative), high: value * (1 + relative) };
}

function growthPoints(sums: LogSums, unfolded: number, range: number): GrowthPoint[] {
  const points: GrowthPoint[] = [];
  for (let edge = 0; edge + OCTAVE < CORRELATION_EDGES; edge++) {
    // The octave must end below the size of the whole, where all slopes fall to 0.
    if (sums.radii[edge + OCTAVE]! > range / 2) break;
    const dimensions: number[] = [];
    for (let m = unfolded; m < sums.dimensions; m++)
      if (octaveSlope(sums, 0, m + 1, edge) !== null) dimensions.push(m);
    if (dimensions.length === 0) continue;
    const at = { radius: sums.radii[edge]!, edge, dimensions };
    const growth = growthAt(sums, 0, at);
    const error = sums.standardError((v) => growthAt(sums, v, at));
    if (error < LARGEST_ERROR) points.push({ ...at, growth, error });
  }
  return points;
}

function growthAt(
  sums: LogSums,
  variant: number,
  { edge, dimensions }: Pick<GrowthPoint, 'edge' | 'dimensions'>,
): number {
  // Successive differences add up to the one between the last and the first dimension.
  const [first, last] = [dimensions[0]!, dimensions[dimensions.length - 1]! + 1];
  const slope = (m: number) => (sums.log(variant, m, edge + OCTAVE) - sums.log(variant, m, edge)) / Math.LN2;
  return (slope(last) - slope(first)) / (last - first);
}

/** Least squares over ln σ, weighted by the points' errors: a coarse scan, then golden sections. */
function bestLevel(points: readonly GrowthPoint[], growth: (p: GrowthPoint) => number): number {
  const values = points.map(growth);
  const misfit = (exponent: number) => {
    const sigma = pow(2, exponent);
    let sum = 0;
    for (let i = 0; i < points.length; i++) {
      const p = points[i]!;
      const d = values[i]! - noiseGrowth(p.radius, sigma);
      sum += (d * d) / (p.error * p.error + 0.0025);
    }
    return sum;
  };
  const low = Math.floor(-8 + logTwo(points[0]!.radius));
  const high = Math.ceil(4 + logTwo(points[points.length - 1]!.radius));
  let best = low;
  for (let e = low; e <= high; e += 0.25) if (misfit(e) < misfit(best)) best = e;
  let [a, b] = [best - 0.25, best + 0.25];
  const golden = 0.6180339887498949;
  for (let i = 0; i < 24; i++) {
    const [c, d] = [b - golden * (b - a), a + golden * (b - a)];
    if (misfit(c) < misfit(d)) b = d;
    else a = c;
  }
  return pow(2, (a + b) / 2);
}

const logTwo = (x: number) => log(x) / Math.LN2;
