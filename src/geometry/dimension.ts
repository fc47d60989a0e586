import { type Answer, finding, type Refusal, refusal } from '../base/answer.ts';
import type { Compute } from '../base/compute.ts';
import { log10 } from '../base/elementary.ts';
import type { Reconstruction } from '../reconstruct/types.ts';
import { matchedStretch } from '../recording/stretch.ts';
import type { PreparedRecord } from '../recording/types.ts';
import { dimensionCurve, OCTAVE, takensEstimate } from './curve.ts';
import {
  FEWEST_RETURNS,
  reasonToDoubt,
  SAME,
  slopeOf,
  tooFewReturns,
  WIDER,
  whyNone,
} from './dimension-refusals.ts';
import { correlationEntropy } from './entropy.ts';
import { linearTwinTask } from './linear-twin.ts';
import { LEVEL, LogSums, STUDENT_90 } from './log-sums.ts';
import { returnsTask } from './returns.ts';
import {
  FEWEST_STEPS,
  findScalingRegion,
  firstEdge,
  halfSlopes,
  type ScalingRegion,
  type ScalingSearch,
} from './scaling.ts';
import { type SumsSetup, setUpSums, spreadTarget } from './setup.ts';
import { sumBlocks } from './sums.ts';
import type { DimensionCurve, DimensionOptions, DimensionResult } from './types.ts';

/** ρ = 0.1: a dimension D needs pairs at a tenth of the attractor's size, ρ^D·N²/2 > 1 (Eckmann & Ruelle 1992). */
export const measurableLimit = (samples: number): number => 2 * log10(samples);
/** Edges looked at from the lower end of a region: three octaves. */
const RETURN_EDGES = 12;
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
  const first = findScalingRegion(sums, setup.range);
  const returns = first.best === null ? NO_RETURNS : await countReturns(setup, sums, first.best, compute);
  const { lowest } = returns;
  const search = lowest > 0 ? findScalingRegion(sums, setup.range, FEWEST_STEPS, lowest) : first;
  const region = search.best;
  const answer =
    region === null
      ? first.best === null
        ? whyNone(sums, setup, search, std, limit)
        : tooFewReturns(sums, lowest, std)
      : (reasonToDoubt(setup, blocks, region, limit) ??
        (await likeLinearNoise(record, setup, sums, region, options.seed, compute)) ??
        dimensionFinding(sums, search, region, returns.at(region.from), std));
  const accepted = answer.ok ? region : null;
  const curve = dimensionCurve(sums, std, accepted, limit);
  if (!answer.ok) return { correlation: answer, entropy: answer, curve };
  const entropy = correlationEntropy(sums, region!, reconstruction.delay.time, record.timeUnit);
  return { correlation: answer, entropy, curve };
}

interface Returns {
  /** First edge from which pairs are at enough different times apart; 0 when those of the whole region are. */
  readonly lowest: number;
  /** Different times of the pairs closer than an edge (at least: those of the last edge counted). */
  readonly at: (edge: number) => number;
}

const NO_RETURNS: Returns = { lowest: 0, at: () => 0 };

async function countReturns(
  setup: SumsSetup,
  sums: LogSums,
  region: ScalingRegion,
  compute: Compute,
): Promise<Returns> {
  const { series, valid, delay, exclusion, blocks } = setup;
  const counts = await compute.run(returnsTask, {
    series,
    valid,
    delay,
    exclusion,
    references: Int32Array.from(blocks.flatMap((b) => Array.from(b))),
    dimension: region.firstDimension,
    radii: sums.radii.slice(region.from, Math.min(region.to, region.from + RETURN_EDGES) + 1),
  });
  const enough = counts.findIndex((n) => n >= FEWEST_RETURNS);
  return {
    lowest: enough === 0 ? 0 : region.from + (enough < 0 ? counts.length : enough),
    at: (edge) => counts[Math.max(0, Math.min(counts.length - 1, edge - region.from))]!,
  };
}

/** Sampling error, spread over the regions that would do, and what bend is left, added as squares. */
function dimensionFinding(
  sums: LogSums,
  search: ScalingSearch,
  region: ScalingRegion,
  returns: number,
  std: number,
): Answer {
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
  // C at the smallest radius is known to 1/√returns, which no choice of blocks shows where all see the same returns.
  const ofReturns = 1 / Math.sqrt(returns) / (sums.logRadii[region.to]! - sums.logRadii[region.from]!);
  const width = Math.sqrt(
    sampling * sampling + STUDENT_90 * STUDENT_90 * spread * spread + bend * bend + ofReturns * ofReturns,
  );
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
      returns,
      takens,
      admissibleRegions: search.admissible.length,
    },
  });
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

function emptyCurve(limit: number): DimensionCurve {
  return { radius: [], sums: [], slopes: [], region: null, byDimension: [], measurableLimit: limit };
}

const say = (x: number) => String(Number(x.toPrecision(3)));
