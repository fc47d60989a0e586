import { type Refusal, refusal } from '../base/answer.ts';
import { LogSums, STUDENT_90 } from './log-sums.ts';
import { findScalingRegion, firstEdge, type ScalingRegion, type ScalingSearch } from './scaling.ts';
import type { SumsSetup } from './setup.ts';
import type { BlockSums } from './sums.ts';

/** The wider exclusion, in Theiler windows. */
export const WIDER = 4;
/** A slope that changes by more than this share under a wider exclusion, or is nearer to noise's than this, is refused. */
export const SAME = 0.1;
/** Ten independent returns leave C known to a third, and a slope over a factor of 4 to a quarter. */
export const FEWEST_RETURNS = 10;

/** Mean slope over the dimensions of a region. */
export function slopeOf(sums: LogSums, variant: number, region: ScalingRegion): number {
  let sum = 0;
  for (let m = region.firstDimension; m <= region.lastDimension; m++)
    sum += sums.slope(variant, m, region.from, region.to);
  return sum / (region.lastDimension - region.firstDimension + 1);
}

/** Too many dimensions for the record, or a slope that hangs on pairs close in time. */
export function reasonToDoubt(
  setup: SumsSetup,
  blocks: readonly BlockSums[],
  region: ScalingRegion,
  limit: number,
): Refusal | null {
  if (region.slope > limit)
    return refusal(
      'HIGH_DIMENSION',
      `The slope of the correlation sum is ${say(region.slope)}; ${setup.samples} samples cannot show a dimension above ${say(limit)} (Eckmann & Ruelle 1992).`,
      'The record would have to be longer by orders of magnitude; look at the forecast skill instead.',
      { slope: region.slope, limit, samples: setup.samples },
    );
  const part = (which: (b: BlockSums) => BlockSums['all']) =>
    new LogSums(blocks.map(which), setup.dimensions, setup.smallestExponent);
  const plain = part((b) => b.some);
  const wide = part((b) => b.wide);
  if (wide.pairs === 0 || wide.count(region.lastDimension, region.from) === 0) return null;
  const change = slopeOf(wide, 0, region) - slopeOf(plain, 0, region);
  const tolerance = Math.max(
    SAME * region.slope,
    STUDENT_90 * plain.standardError((v) => slopeOf(wide, v, region) - slopeOf(plain, v, region)),
  );
  if (Math.abs(change) <= tolerance) return null;
  return refusal(
    'NO_SCALING_REGION',
    `The slope of the correlation sum changes from ${say(slopeOf(plain, 0, region))} to ${say(slopeOf(wide, 0, region))} when pairs less than ${WIDER} decorrelation windows apart are left out, so it comes from closeness in time.`,
    'Record longer, so that states return many times after they have been forgotten.',
    { before: slopeOf(plain, 0, region), after: slopeOf(wide, 0, region) },
  );
}

export function tooFewReturns(sums: LogSums, lowest: number, std: number): Refusal {
  const radius = sums.radii[Math.min(63, lowest)]! * std;
  return refusal(
    'TOO_SHORT',
    `States come closer than ${say(radius)} after fewer than ${FEWEST_RETURNS} different times only, so the correlation sum there shows these returns and not the set of states; above, no range of a factor of 4 is left.`,
    'Record longer: nearly periodic motion needs many turns.',
    { radius, returns: FEWEST_RETURNS },
  );
}

/** No region: because of noise, because slopes grow with the embedding, or because none is constant. */
export function whyNone(
  sums: LogSums,
  setup: SumsSetup,
  search: ScalingSearch,
  std: number,
  limit: number,
): Refusal {
  const short = findScalingRegion(sums, setup.range, 4).best;
  if (short !== null && short.slope <= limit) {
    const [low, high] = [sums.radii[short.from]!, sums.radii[short.to]!];
    return refusal(
      'NOISE_FLOOR',
      `Slopes of dimensions ${short.firstDimension} to ${short.lastDimension} agree (${say(short.slope)}) only for distances ${say(low * std)} to ${say(high * std)}, a factor of ${say(high / low)}; 4 is needed. Below, noise or too few pairs hide the structure.`,
      'Record with less sensor noise or finer resolution, or longer.',
      { slope: short.slope, low: low * std, high: high * std },
    );
  }
  if (search.flatDimensions >= 3) {
    const slopes = steepest(sums, setup.range);
    const last = slopes[slopes.length - 1]!;
    const code = last.slope > limit ? 'HIGH_DIMENSION' : 'NO_SATURATION';
    return refusal(
      code,
      `The slope of the correlation sum grows with the embedding: ${slopes.map((s) => `${say(s.slope)} in ${s.dimension}`).join(', ')} dimensions. Noise does that, and so does motion of more dimensions than ${setup.samples} samples resolve (about ${say(limit)}).`,
      'If the record is not noise, it needs to be much longer or less noisy.',
      { dimension: last.dimension, slope: last.slope, limit },
    );
  }
  return refusal(
    'NO_SCALING_REGION',
    `In no range of distances of a factor of 4 is the slope of the correlation sum constant in three successive dimensions (${search.flatDimensions} of ${sums.dimensions} dimensions have a straight range of their own).`,
    'Record longer or with less noise; a record of few distinct states has no dimension.',
    { flatDimensions: search.flatDimensions, dimensions: sums.dimensions },
  );
}

/** Slope over the lowest factor of 4 with enough pairs, for every other dimension that has one. */
function steepest(sums: LogSums, range: number) {
  const out: { dimension: number; slope: number }[] = [];
  for (let m = 1; m <= sums.dimensions; m++) {
    const from = firstEdge(sums, m);
    if (from + 8 < 64 && sums.radii[from + 8]! <= range / 2)
      out.push({ dimension: m, slope: sums.slope(0, m, from, from + 8) });
  }
  return out.length > 4 ? out.filter((_, i) => (out.length - 1 - i) % 2 === 0) : out;
}

const say = (x: number) => String(Number(x.toPrecision(3)));
