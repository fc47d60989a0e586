import { CORRELATION_EDGES } from '../base/kernels.ts';
import type { LogSums } from './log-sums.ts';

/** Edges spanned at least: two octaves, a factor of 4 in radius. */
export const FEWEST_STEPS = 8;
/**
 * Pairs behind the smallest radius used: 100 independent pairs leave 10 % in C and 7 % in a slope over a
 * factor of 4.
 */
export const FEWEST_PAIRS = 100;
/**
 * Largest radius as a share of the range of values. Eckmann & Ruelle 1992 (Physica D 56, 185) take a tenth; where
 * noise leaves no region below it, a quarter is tried: beyond, the shape of the attractor as a whole is seen.
 */
const LARGEST_SHARES = [0.1, 0.25];
/** Slopes of the lower and upper half of a region may differ from the whole's by this share. */
const FLATNESS = 0.1;
/** The largest and smallest slope of the dimensions that agree may differ by this share of their mean. */
const AGREEMENT = 0.06;
/** Dimensions that must agree. */
export const FEWEST_AGREEING = 3;
/** Below this slope the states are a finite set of points, and dimension says nothing. */
const SMALLEST_SLOPE = 0.15;

/** Edges from … to (both included) over which dimensions first … last agree. */
export interface ScalingRegion {
  readonly from: number;
  readonly to: number;
  readonly firstDimension: number;
  readonly lastDimension: number;
  /** Mean slope over the dimensions. */
  readonly slope: number;
}

export interface ScalingSearch {
  readonly best: ScalingRegion | null;
  /** All regions that would do, at least two thirds as long as the best. */
  readonly admissible: readonly ScalingRegion[];
  /** How many dimensions have a flat range of their own, whether or not they agree: tells the two refusals apart. */
  readonly flatDimensions: number;
}

/** First usable edge of a dimension: enough pairs behind it. */
export function firstEdge(sums: LogSums, dimension: number): number {
  let b = 0;
  while (b < CORRELATION_EDGES && sums.count(dimension, b) < FEWEST_PAIRS) b++;
  return b;
}

/** Last edge at or below a radius. */
function lastEdge(sums: LogSums, radius: number): number {
  let b = CORRELATION_EDGES - 1;
  while (b >= 0 && sums.radii[b]! > radius) b--;
  return b;
}

/**
 * The longest range of radii in which ln C is straight and has the same slope in at least three successive
 * dimensions. Straight: the slopes of the lower and the upper half agree with that of the whole within 10 %,
 * or their error if that is larger (up to 15 %). Halves rather than local slopes, because self-similar sets
 * wave around their line.
 */
export function findScalingRegion(
  sums: LogSums,
  range: number,
  fewestSteps: number = FEWEST_STEPS,
  lowest = 0,
): ScalingSearch {
  let found: ScalingSearch = { best: null, admissible: [], flatDimensions: 0 };
  for (const share of LARGEST_SHARES) {
    found = searchUpTo(sums, lowest, lastEdge(sums, share * range), fewestSteps);
    if (found.best !== null) break;
  }
  return found;
}

function searchUpTo(sums: LogSums, lowest: number, last: number, fewestSteps: number): ScalingSearch {
  const firsts = Array.from({ length: sums.dimensions }, (_, i) => Math.max(lowest, firstEdge(sums, i + 1)));
  const admissible: ScalingRegion[] = [];
  const flat = new Set<number>();
  for (let from = Math.min(...firsts); from + fewestSteps <= last; from++)
    for (let to = from + fewestSteps; to <= last; to++) {
      const slopes = firsts.map((first, i) => (from < first ? null : flatSlope(sums, i + 1, from, to)));
      for (let i = 0; i < slopes.length; i++) if (slopes[i] !== null) flat.add(i + 1);
      const run = longestAgreement(slopes);
      if (run !== null) admissible.push({ from, to, ...run });
    }
  let best: ScalingRegion | null = null;
  for (const region of admissible) if (best === null || better(region, best)) best = region;
  if (best === null) return { best, admissible: [], flatDimensions: flat.size };
  const length = best.to - best.from;
  return {
    best,
    admissible: admissible.filter((r) => 3 * (r.to - r.from) >= 2 * length),
    flatDimensions: flat.size,
  };
}

/** Longer in radius; then more dimensions. */
function better(a: ScalingRegion, b: ScalingRegion): boolean {
  const difference = a.to - a.from - (b.to - b.from);
  if (difference !== 0) return difference > 0;
  return a.lastDimension - a.firstDimension > b.lastDimension - b.firstDimension;
}

/** Slope of a dimension over a range, null where its two halves disagree with it. */
function flatSlope(sums: LogSums, dimension: number, from: number, to: number): number | null {
  const slope = sums.slope(0, dimension, from, to);
  if (!(slope >= SMALLEST_SLOPE)) return null;
  const middle = (from + to) >> 1;
  for (const [a, b] of [
    [from, middle],
    [middle, to],
  ] as const) {
    const off = Math.abs(sums.slope(0, dimension, a, b) - slope);
    if (off <= FLATNESS * slope) continue;
    if (off > 1.5 * FLATNESS * slope) return null;
    if (off > sums.standardError((v) => sums.slope(v, dimension, a, b))) return null;
  }
  return slope;
}

function longestAgreement(slopes: readonly (number | null)[]) {
  let best: Omit<ScalingRegion, 'from' | 'to'> | null = null;
  for (let first = 0; first < slopes.length; first++) {
    let sum = 0;
    let low = Number.POSITIVE_INFINITY;
    let high = Number.NEGATIVE_INFINITY;
    for (let last = first; last < slopes.length; last++) {
      const slope = slopes[last]!;
      if (slope === null) break;
      sum += slope;
      low = Math.min(low, slope);
      high = Math.max(high, slope);
      const n = last - first + 1;
      const mean = sum / n;
      if (high - low > AGREEMENT * mean) break;
      // Of runs as long, the one in more dimensions: the lower may not have unfolded the attractor yet.
      if (n >= FEWEST_AGREEING && (best === null || n >= best.lastDimension - best.firstDimension + 1))
        best = { firstDimension: first + 1, lastDimension: last + 1, slope: mean };
    }
  }
  return best;
}

/** Slopes over the lower and the upper half of a range. */
export function halfSlopes(sums: LogSums, dimension: number, from: number, to: number): [number, number] {
  const middle = (from + to) >> 1;
  return [sums.slope(0, dimension, from, middle), sums.slope(0, dimension, middle, to)];
}
