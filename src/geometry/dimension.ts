import { type Answer, finding, type Refusal, refusal } from '../base/answer.ts';
import type { Compute } from '../base/compute.ts';
import { log10 } from '../base/elementary.ts';
import type { Reconstruction } from '../reconstruct/types.ts';
import { matchedStretch } from '../recording/stretch.ts';
import type { PreparedRecord } from '../recording/types.ts';
import { dimensionCurve, OCTAVE, takensEstimate } from './curve.ts';
import { correlationEntropy } from './entropy.ts';
import { linearTwinTask } from './linear-twin.ts';
import { LEVEL, LogSums, STUDENT_90 } from './log-sums.ts';
import {
  findScalingRegion,
  firstEdge,
  halfSlopes,
  type ScalingRegion,
  type ScalingSearch,
} from './scaling.ts';
import { type SumsSetup, setUpSums, spreadTarget } from './setup.ts';
import { type BlockSums, sumBlocks } from './sums.ts';
import type { DimensionCurve, DimensionOptions, DimensionResult } from './types.ts';

/** ρ = 0.1: a dimension D needs pairs at a tenth of the attractor's size, ρ^D·N²/2 > 1 (Eckmann & Ruelle 1992). */
export const measurableLimit = (samples: number): number => 2 * log10(samples);
/** The wider exclusion, in Theiler windows. */
const WIDER = 4;
/** A slope that changes by more than this share under a wider exclusion, or is nearer to noise's than this, is refused. */
const SAME = 0.1;
/** A dimension known to less than a third says nothing. */
const LARGEST_WIDTH = 1 / 3;
/** Samples and reference points of the surrogate. */
const TWIN_SAMPLES = 8_192;
const TWIN_REFERENCES = 400;

const METHOD =
  'correlation sum (Grassberger & Procaccia 1983, Physica D 9, 189), Theiler exclusion, block jackknife';

/**
 * Correlation dimension D₂ and entropy K₂ of the target channel, or why the record carries none. Coloured noise
 * can show finite slopes (Osborne & Provenzale 1989, Physica D 35, 357; Theiler 1991, Phys. Lett. A 155, 480):
 * a slope must be shared by three dimensions, stay when the exclusion is widened, and differ from a surrogate's.
 */
export async function estimateDimension(
  record: PreparedRecord,
  reconstruction: Reconstruction,
  options: DimensionOptions & { readonly seed: number },
  compute: Compute,
): Promise<DimensionResult> {
  const limit = measurableLimit(Math.max(2, record.count));
  const setup = setUpSums(record, reconstruction, options);
  if ('ok' in setup) return { correlation: setup, entropy: setup, curve: emptyCurve(limit) };
  const wide = Math.min(WIDER * setup.exclusion, Math.floor(setup.samples / 3));
  const blocks = await sumBlocks(setup, Math.max(wide, setup.exclusion + 1), compute);
  compute.throwIfAborted();
  const sums = new LogSums(
    blocks.map((b) => b.all),
    setup.dimensions,
    setup.smallestExponent,
  );
  const std = record.stds[record.target]!;
  const search = findScalingRegion(sums, setup.range);
  const region = search.best;
  const answer =
    region === null
      ? whyNone(sums, setup, search, std, limit)
      : (reasonToDoubt(setup, blocks, region, limit) ??
        (await likeLinearNoise(record, setup, sums, region, options.seed, compute)) ??
        dimensionFinding(sums, search, region, std));
  const accepted = answer.ok ? region : null;
  const curve = dimensionCurve(sums, std, accepted, limit);
  if (!answer.ok) return { correlation: answer, entropy: answer, curve };
  const entropy = correlationEntropy(sums, region!, reconstruction.delay.time, record.timeUnit);
  return { correlation: answer, entropy, curve };
}

/** Mean slope over the dimensions of a region. */
function slopeOf(sums: LogSums, variant: number, region: ScalingRegion): number {
  let sum = 0;
  for (let m = region.firstDimension; m <= region.lastDimension; m++)
    sum += sums.slope(variant, m, region.from, region.to);
  return sum / (region.lastDimension - region.firstDimension + 1);
}

/** Sampling error, spread over the regions that would do, and what bend is left, added as squares. */
function dimensionFinding(sums: LogSums, search: ScalingSearch, region: ScalingRegion, std: number): Answer {
  const value = region.slope;
  const standardError = sums.standardError((v) => slopeOf(sums, v, region));
  const spread = Math.sqrt(
    search.admissible.reduce((sum, r) => sum + (r.slope - value) * (r.slope - value), 0) /
      search.admissible.length,
  );
  let bend = 0;
  let takens = 0;
  for (let m = region.firstDimension; m <= region.lastDimension; m++) {
    const [lower, upper] = halfSlopes(sums, m, region.from, region.to);
    bend = Math.max(bend, Math.abs(lower - upper) / 2);
    takens += takensEstimate(sums, 0, m, region.from, region.to) ?? value;
  }
  takens /= region.lastDimension - region.firstDimension + 1;
  // Slopes that still rise over the dimensions that agree may not have arrived.
  const rise = Math.max(
    0,
    sums.slope(0, region.lastDimension, region.from, region.to) -
      sums.slope(0, region.firstDimension, region.from, region.to),
  );
  const sampling = STUDENT_90 * standardError;
  const width = Math.sqrt(sampling * sampling + STUDENT_90 * STUDENT_90 * spread * spread + bend * bend);
  if (width > LARGEST_WIDTH * value)
    return refusal(
      'TOO_SHORT',
      `The slope of the correlation sum is ${say(value)} but uncertain by ${say(width)}: too few independent returns to neighbouring states.`,
      'Record longer, so that states return many times.',
      { slope: value, width },
    );
  return finding({
    value,
    // Two estimators that disagree say that the region is not clean: the interval holds both.
    low: Math.max(0, Math.min(value - width, takens)),
    high: Math.max(value + Math.sqrt(width * width + rise * rise), takens),
    level: LEVEL,
    unit: '1',
    method: METHOD,
    evidence: {
      region: [sums.radii[region.from]! * std, sums.radii[region.to]! * std],
      dimensions: [region.firstDimension, region.lastDimension],
      standardError,
      spread,
      bend,
      rise,
      takens,
      admissibleRegions: search.admissible.length,
    },
  });
}

/** Too many dimensions for the record, or a slope that hangs on pairs close in time. */
function reasonToDoubt(
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

/**
 * Where slopes go on rising with the embedding somewhere within reach, a plateau above may be that of a narrow
 * band of noise: a surrogate shows the same one. Only motion whose slopes agree in all dimensions down to the last
 * pairs, such as a few sharp lines, is let pass without the comparison, since its surrogates are alike.
 */
async function likeLinearNoise(
  record: PreparedRecord,
  setup: SumsSetup,
  sums: LogSums,
  region: ScalingRegion,
  seed: number,
  compute: Compute,
): Promise<Refusal | null> {
  const resolved = firstEdge(sums, region.lastDimension);
  if (region.lastDimension === sums.dimensions && region.from <= resolved + 2) return null;
  const stretch = matchedStretch(record, TWIN_SAMPLES);
  if (stretch === null || stretch.count <= 2 * (setup.dimensions - 1) * setup.delay) return null;
  const { delay, dimensions, exclusion, smallestExponent } = setup;
  const blocks = await compute.run(linearTwinTask, {
    series: spreadTarget(record, seed).slice(stretch.start, stretch.start + stretch.count),
    delay,
    dimensions,
    exclusion: Math.min(exclusion, Math.floor(stretch.count / 4)),
    smallestExponent,
    references: TWIN_REFERENCES,
    seed,
  });
  const twin = new LogSums(blocks, dimensions, smallestExponent);
  // The largest dimension in which both have pairs over an octave; in one dimension they are alike by construction.
  let m = region.lastDimension;
  const start = () => Math.max(region.from, firstEdge(twin, m));
  while (m > 1 && region.to - start() < OCTAVE) m--;
  // Noise that does not come that close at all is unlike the record.
  if (m < 2) return null;
  const from = start();
  const own = sums.slope(0, m, from, region.to);
  const ofTwin = twin.slope(0, m, from, region.to);
  const tolerance = Math.max(
    SAME * region.slope,
    STUDENT_90 * twin.standardError((v) => twin.slope(v, m, from, region.to)),
  );
  if (ofTwin - own > tolerance) return null;
  return refusal(
    'NO_SATURATION',
    `A slope of ${say(own)} is shared by dimensions ${region.firstDimension} to ${region.lastDimension}, but linear noise with the same spectrum shows ${say(ofTwin)} in ${m}, and at smaller distances the slope grows with the embedding.`,
    'A less noisy or longer record may show whether the growth is the sensor’s noise or the motion’s own.',
    { slope: own, surrogate: ofTwin },
  );
}

/** No region: because of noise, because slopes grow with the embedding, or because none is constant. */
function whyNone(
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

function emptyCurve(limit: number): DimensionCurve {
  return { radius: [], sums: [], slopes: [], region: null, byDimension: [], measurableLimit: limit };
}

const say = (x: number) => String(Number(x.toPrecision(3)));
