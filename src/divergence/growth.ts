import type { MeanCurve } from './mean-curve.ts';

/** Growth covered at least, in e-folds: a factor e² in distance. */
export const FEWEST_FOLDS = 2;
/** Points of a range at least; a map that grows fast has few. */
export const FEWEST_POINTS = { flow: 8, map: 4 } as const;
/** Slopes of the two halves may differ by this share, or by their error if that is larger, up to twice this. */
const BEND = 0.15;
/** A range ends at least this far (e-folds) below where the curve levels off: beyond, the fastest pairs have arrived. */
export const BELOW_LEVEL = 0.7;
/** Ends of ranges tried: a grid of this many steps keeps the search quadratic in it, not in the steps. */
const GRID = 96;

export interface GrowthLimits {
  /** First step that may enter: initial alignment is over. */
  readonly earliest: number;
  /** ln distance above which differences are motion and not noise; −Infinity without noise. */
  readonly floor: number;
  readonly dynamics: 'flow' | 'map';
  /** Steps before lead 0 at which the states were close already: where a power law would have begun. */
  readonly origin: number;
}

export interface GrowthRange {
  readonly from: number;
  readonly to: number;
  /** Per step. */
  readonly slope: number;
  /** slope · (to − from). */
  readonly folds: number;
  /** Slope of the later half less that of the earlier, as a share of the slope. */
  readonly bend: number;
}

export interface Growth {
  /** The straight range whose slope is known best (`rangeError`), null where none has two e-folds. */
  readonly best: GrowthRange | null;
  /** Straight ranges with at least two thirds of its e-folds. */
  readonly admissible: readonly GrowthRange[];
  /** Where the curve levels off, and where ranges may begin. */
  readonly level: number;
  readonly start: number;
  /** Growth there is between the two, straight or not, in e-folds. */
  readonly room: number;
  /** The most e-folds of a range that is not straight, for the refusal. */
  readonly bent: GrowthRange | null;
}

/**
 * The range of steps over which a divergence curve grows exponentially: two e-folds at least, after the initial
 * alignment, above the noise, below the level, and straight: both halves have the slope of the whole, and a power
 * law that began when the states were close, as diffusion and smooth noise give, fits worse.
 */
export function growthOf(curve: MeanCurve, limits: GrowthLimits): Growth {
  const level = levelOf(curve);
  let start = limits.earliest;
  while (start < curve.steps && !(curve.value(start) >= limits.floor)) start++;
  const room = start >= curve.steps ? 0 : level - curve.value(start);
  const admissible: GrowthRange[] = [];
  let bent: GrowthRange | null = null;
  let end = start;
  while (end < curve.steps && curve.value(end + 1) <= level - BELOW_LEVEL) end++;
  const points = FEWEST_POINTS[limits.dynamics];
  if (curve.known(start, end)) {
    const stride = Math.max(1, Math.ceil((end - start) / GRID));
    for (let from = start; from + points - 1 <= end; from += stride)
      for (let to = from + points - 1; to <= end; to += stride) {
        const range = measure(curve, from, to);
        if (!(range.folds >= FEWEST_FOLDS)) continue;
        if (isStraight(curve, range, limits.origin)) admissible.push(range);
        else if (bent === null || range.folds > bent.folds) bent = range;
      }
  }
  let best: GrowthRange | null = null;
  let smallest = Number.POSITIVE_INFINITY;
  for (const range of admissible) {
    const error = rangeError(curve, range);
    if (error < smallest) [best, smallest] = [range, error];
  }
  const least = best === null ? 0 : Math.max(FEWEST_FOLDS, (2 / 3) * best.folds);
  return { best, admissible: admissible.filter((r) => r.folds >= least), level, start, room, bent };
}

/** Error of a range's slope: sampling (block jackknife), and half of what its halves differ by from the whole. */
export function rangeError(curve: MeanCurve, { from, to, slope, bend }: GrowthRange): number {
  const sampling = curve.standardError((v) => curve.slope(v, from, to));
  const systematic = (bend * slope) / 2;
  return Math.sqrt(sampling * sampling + systematic * systematic);
}

/** Mean of the last fifth, where differences no longer grow if the curve was followed far enough. */
export function levelOf(curve: MeanCurve): number {
  return curve.mean(0, Math.floor(0.8 * curve.steps), curve.steps);
}

export function measure(curve: MeanCurve, from: number, to: number): GrowthRange {
  const slope = curve.slope(0, from, to);
  const middle = (from + to) >> 1;
  const change = curve.slope(0, middle, to) - curve.slope(0, from, middle);
  return { from, to, slope, folds: slope * (to - from), bend: slope !== 0 ? change / slope : 0 };
}

function isStraight(curve: MeanCurve, { from, to, slope, bend }: GrowthRange, origin: number): boolean {
  if (Math.abs(bend) > 2 * BEND) return false;
  if (Math.abs(bend) > BEND) {
    const middle = (from + to) >> 1;
    const error = curve.standardError((v) => curve.slope(v, middle, to) - curve.slope(v, from, middle));
    if (Math.abs(bend) * slope > error) return false;
  }
  // At step 0 a power law without origin would be at −∞.
  const { line, power } = curve.residuals(from, to, from === 0 ? Math.max(1, origin) : origin);
  const { line: again, power: late } = from > 0 ? curve.residuals(from, to, 0) : { line, power };
  return line <= power && again <= late;
}
