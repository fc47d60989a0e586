import { type Answer, finding, type Refusal, refusal } from '../base/answer.ts';
import type { Compute } from '../base/compute.ts';
import { log } from '../base/elementary.ts';
import type { Reconstruction } from '../reconstruct/types.ts';
import type { PreparedRecord } from '../recording/types.ts';
import { type CurveSums, divergenceCurveTask } from './curve.ts';
import { type Growth, type GrowthLimits, type GrowthRange, growthOf, rangeError } from './growth.ts';
import { MeanCurve } from './mean-curve.ts';
import { noGrowth } from './refusals.ts';
import { compareSurrogates } from './surrogates.ts';
import type { DivergenceCurve, DivergenceOptions, DivergenceResult } from './types.ts';
import { countFollowable, evenReferences, followable } from './vectors.ts';

const REFERENCES = 4_000;
/** Distances (references · steps · coordinates) followed at most: some 30 ms of compiled code. */
const WORK = 3_000_000;
/** References while the number of steps is being found. */
const SCOUTS = 300;
/** Fewest vectors that can be followed, and references: five to a block. */
const FEWEST_VECTORS = 200;
/** Steps tried first, in characteristic times; doubled while the curve still grows. */
const FIRST_STEPS = 16;
/** A curve that rises by less than this (e-folds) in its second half has levelled off. */
const LEVELLED = 0.15;
const MOST_STEPS = 8_192;
/**
 * Differences count as motion above three times what noise alone gives: there it adds 5 % to the distance and takes
 * 11 % off the slope, less than a bend that is tolerated.
 */
const ABOVE_NOISE = log(3);
/** Standard deviations by which neighbours must stay closer than in surrogates; 3 of 9 is 0.8 % by Student's t. */
const CLOSER = 3;
/** 95 % quantile of Student's t with 19 degrees of freedom. */
const STUDENT_90 = 1.729;
const LEVEL = 0.9;
/**
 * Standard deviation, as a share, of exponents of flows from small but finite differences: those of Rosenstein,
 * Collins & De Luca (1993, Tables 2 and 3) from clean records lie up to 10 % from the truth.
 */
const FINITE_DIFFERENCES = 0.05;
/** The two curves may differ by this share; more means that neither is understood. */
const CURVES_AGREE = 0.35;

const METHOD =
  'growth of the distance of nearest neighbours (Rosenstein, Collins & De Luca 1993), beside that of neighbourhoods (Kantz 1994), compared with surrogates';

/** Largest Lyapunov exponent from a record, or why its small differences show none. */
export async function estimateDivergence(
  record: PreparedRecord,
  reconstruction: Reconstruction,
  options: DivergenceOptions & { readonly seed: number; readonly noise: Answer },
  compute: Compute,
): Promise<DivergenceResult> {
  const shift =
    reconstruction.dynamics === 'flow'
      ? Math.min(2 * reconstruction.correlationTime.samples, Math.floor(record.count / 50))
      : null;
  const sums = await followLongEnough(record, reconstruction, options, shift, compute);
  if ('ok' in sums) return { largest: sums, curve: EMPTY_CURVE };
  compute.throwIfAborted();
  const nearest = new MeanCurve(sums.nearest, sums.steps);
  const plain = new MeanCurve(sums.plain, sums.steps);
  const neighbourhood = new MeanCurve(sums.neighbourhood, sums.steps);
  const limits = growthLimits(record, reconstruction, options.noise);
  const growth = growthOf(nearest, limits);
  const others = growthOf(neighbourhood, { ...limits, floor: Number.NEGATIVE_INFINITY });
  const { best } = growth;
  const refused =
    best === null
      ? noGrowth(record, nearest, growth, limits)
      : await likeLinearNoise(record, reconstruction, best, shift, options.seed, compute);
  const largest = refused ?? exponent(record, nearest, plain, growth, neighbourhood, others, limits.dynamics);
  const fit = largest.ok ? best : null;
  return { largest, curve: divergenceCurve(record, nearest, neighbourhood, fit, sums.ceiling) };
}

/** Follows pairs until the mean curve has levelled off, or the record allows no more. */
async function followLongEnough(
  record: PreparedRecord,
  reconstruction: Reconstruction,
  options: DivergenceOptions & { readonly seed: number },
  shift: number | null,
  compute: Compute,
): Promise<CurveSums | Refusal> {
  const { dynamics, correlationTime, delay, delaysPerChannel, theilerWindow } = reconstruction;
  const span = (delaysPerChannel - 1) * delay.samples;
  const countFor = (steps: number) => countFollowable(record, reconstruction, steps, shift);
  const all = countFor(1);
  // Beyond, fewer than two thirds of the vectors could be followed.
  const allowed = (steps: number) =>
    steps <= MOST_STEPS && 3 * countFor(steps) >= Math.max(3 * FEWEST_VECTORS, 2 * all);
  const follow = (steps: number, most: number) => {
    const vectors = followable(record, reconstruction, steps, shift);
    return compute.run(divergenceCurveTask, {
      vectors,
      targetOffset: record.target * record.count,
      references: evenReferences(vectors.starts.length, most),
      exclusion: theilerWindow.samples,
      steps,
      seed: options.seed,
      shift,
    });
  };
  let steps = options.steps ?? Math.max(24, span + FIRST_STEPS * correlationTime.samples);
  while (!allowed(steps) && steps > 8) steps = Math.floor(steps / 2);
  if (!allowed(steps))
    return refusal(
      'TOO_SHORT',
      `Only ${countFor(steps)} states can be followed for ${steps} samples within an unbroken stretch; at least ${FEWEST_VECTORS} are needed.`,
      'Record longer, or without gaps.',
      { count: record.count, steps },
    );
  if (options.steps === undefined)
    while (allowed(2 * steps)) {
      const curve = new MeanCurve((await follow(steps, SCOUTS)).nearest, steps);
      const half = steps >> 1;
      const rise =
        curve.mean(0, Math.floor(0.9 * steps), steps) - curve.mean(0, half, half + Math.ceil(0.1 * steps));
      if (!(rise > LEVELLED)) break;
      steps *= 2;
    }
  const cost = steps * reconstruction.embeddingDimension * (dynamics === 'flow' ? 3 : 1);
  const references = options.references ?? Math.min(REFERENCES, Math.max(1_000, Math.floor(WORK / cost)));
  return follow(steps, references);
}

/** When growth may begin: after the alignment and above the noise. */
function growthLimits(record: PreparedRecord, reconstruction: Reconstruction, noise: Answer): GrowthLimits {
  const { dynamics, delay, delaysPerChannel, correlationTime, embeddingDimension } = reconstruction;
  const span = (delaysPerChannel - 1) * delay.samples;
  const std = record.stds[record.target]!;
  const sensor = record.givenNoise ?? (noise.ok && noise.bound !== 'upper' ? noise.value : 0);
  const sigma = Math.max(sensor, record.resolutionStep / Math.sqrt(12)) / std;
  return {
    earliest: Math.max(1, span, dynamics === 'flow' ? Math.ceil(correlationTime.samples / 2) : 0),
    // Two states with independent noise in each of m coordinates are σ·√(2m) apart.
    floor:
      sigma > 0 ? log(sigma * Math.sqrt(2 * embeddingDimension)) + ABOVE_NOISE : Number.NEGATIVE_INFINITY,
    dynamics,
    origin: span,
  };
}

async function likeLinearNoise(
  record: PreparedRecord,
  reconstruction: Reconstruction,
  range: GrowthRange,
  shift: number | null,
  seed: number,
  compute: Compute,
): Promise<Refusal | null> {
  const compared = await compareSurrogates(record, reconstruction, range, shift, seed, compute);
  if (compared === null || compared.standardScore > CLOSER) return null;
  return refusal(
    'NO_EXPONENTIAL_GROWTH',
    `Differences grow along a straight stretch of ${say(range.folds)} e-folds, but in linear noise with the same spectrum neighbours stay as close (${say(compared.standardScore)} standard deviations closer in the record; ${CLOSER} are asked for).`,
    'A longer or less noisy record may tell the two apart.',
    { standardScore: compared.standardScore, folds: range.folds },
  );
}

/**
 * Sampling error, choice of range, bend, and what the two curves differ by beyond their errors, added as squares; on
 * the side where another distance puts the slope, that difference as well.
 */
function exponent(
  record: PreparedRecord,
  nearest: MeanCurve,
  plain: MeanCurve,
  growth: Growth,
  neighbourhood: MeanCurve,
  others: Growth,
  dynamics: 'flow' | 'map',
): Answer {
  const { best, admissible } = growth;
  const { slope, from, to, folds, bend } = best!;
  const perTime = 1 / record.interval;
  const error = rangeError(nearest, best!);
  const spread = Math.sqrt(
    admissible.reduce((sum, r) => sum + (r.slope - slope) * (r.slope - slope), 0) / admissible.length,
  );
  // The growth of infinitesimal differences does not depend on how they are measured; how much that of finite
  // ones does tells how far they are from infinitesimal.
  const byMeasure = plain.slope(0, from, to) - slope;
  const finite = dynamics === 'flow' ? FINITE_DIFFERENCES * slope : 0;
  let width = STUDENT_90 * Math.sqrt(error * error + spread * spread + finite * finite);
  const other = others.best;
  if (other !== null) {
    const difference = Math.abs(other.slope - slope);
    if (difference > CURVES_AGREE * slope)
      return refusal(
        'NO_EXPONENTIAL_GROWTH',
        `Two ways to measure the growth of small differences disagree: ${say(slope * perTime)} by nearest neighbours, ${say(other.slope * perTime)} by neighbourhoods, per ${record.timeUnit}.`,
        'Record longer or with less noise, so that both have a clear straight range.',
        { nearest: slope * perTime, neighbourhood: other.slope * perTime },
      );
    // Their means over ln and of ln differ by nature; half of what the errors do not explain is doubt.
    const beyond = Math.max(0, difference - width - STUDENT_90 * rangeError(neighbourhood, other)) / 2;
    width = Math.sqrt(width * width + beyond * beyond);
  }
  const low = slope + Math.min(0, byMeasure) - width;
  const high = slope + Math.max(0, byMeasure) + width;
  if (low <= 0)
    return refusal(
      'NO_EXPONENTIAL_GROWTH',
      `The growth rate ${say(slope * perTime)} per ${record.timeUnit} may be anything from ${say(low * perTime)} to ${say(high * perTime)}, zero included.`,
      'A longer record narrows the interval.',
      { slope: slope * perTime, low: low * perTime, high: high * perTime },
    );
  return finding({
    value: slope * perTime,
    low: low * perTime,
    high: high * perTime,
    level: LEVEL,
    unit: `1/${record.timeUnit}`,
    method: METHOD,
    evidence: {
      from: from * record.interval,
      to: to * record.interval,
      steps: to - from,
      folds,
      bend,
      standardError: error * perTime,
      spread: spread * perTime,
      byMeasure: byMeasure * perTime,
      fewSteps: to - from < 8,
      ...(other === null ? {} : { neighbourhood: other.slope * perTime }),
    },
  });
}

/** Points of the published curve at most. */
const MOST_POINTS = 400;

function divergenceCurve(
  record: PreparedRecord,
  nearest: MeanCurve,
  neighbourhood: MeanCurve,
  fit: GrowthRange | null,
  ceiling: number,
): DivergenceCurve {
  const unit = log(record.stds[record.target]!);
  const stride = Math.max(1, Math.ceil((nearest.steps + 1) / MOST_POINTS));
  const steps: number[] = [];
  for (let s = 0; s <= nearest.steps; s += stride) if (Number.isFinite(nearest.value(s))) steps.push(s);
  return {
    time: steps.map((s) => s * record.interval),
    nearest: steps.map((s) => nearest.value(s) + unit),
    neighbourhood: steps.map((s) =>
      Number.isFinite(neighbourhood.value(s)) ? neighbourhood.value(s) + unit : null,
    ),
    fit:
      fit === null
        ? null
        : {
            from: fit.from * record.interval,
            to: fit.to * record.interval,
            slope: fit.slope / record.interval,
            intercept: nearest.mean(0, fit.from, fit.to) - (fit.slope * (fit.from + fit.to)) / 2 + unit,
          },
    ceiling: ceiling + unit,
  };
}

const EMPTY_CURVE: DivergenceCurve = { time: [], nearest: [], neighbourhood: [], fit: null, ceiling: 0 };

const say = (x: number) => String(Number(x.toPrecision(3)));
