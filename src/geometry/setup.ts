import { type Refusal, refusal } from '../base/answer.ts';
import { powerOfTwo } from '../base/elementary.ts';
import { createRandom } from '../base/random.ts';
import type { Reconstruction } from '../reconstruct/types.ts';
import type { PreparedRecord } from '../recording/types.ts';

/** Blocks of reference points, equal in number and contiguous in time: 19 degrees of freedom for the jackknife. */
export const BLOCKS = 20;
export const DEFAULT_REFERENCES = 2_000;
export const DEFAULT_DIMENSIONS = 10;
/** Beyond this many samples, evenly spread stretches of the record that hold this many are used: bounded cost. */
const MOST_SAMPLES = 100_000;
const STRETCHES = 20;
/** Fewest complete vectors; below, not even C = 1/1000 is resolved to 10 % (100 pairs of 200²/2). */
const FEWEST_VECTORS = 200;
/** Dimensions needed to see three agree beyond the first. */
const FEWEST_DIMENSIONS = 4;

/** What correlation sums of a record are computed from, in scaled units (standard deviations). */
export interface SumsSetup {
  readonly series: Float64Array;
  readonly valid: Uint8Array;
  readonly delay: number;
  readonly dimensions: number;
  readonly exclusion: number;
  readonly smallestExponent: number;
  /** Start indices in time order, cut into `BLOCKS` blocks. */
  readonly blocks: readonly Int32Array[];
  /** Largest minus smallest value. */
  readonly range: number;
  /** Samples of the stretches used. */
  readonly samples: number;
}

export interface SetupOptions {
  readonly maximumDimension?: number;
  readonly references?: number;
  readonly seed: number;
}

/**
 * The target channel, spread over its quantiser's steps, with flags of complete vectors, random reference
 * points and a radius grid that ends at the range of the values.
 */
export function setUpSums(
  record: PreparedRecord,
  reconstruction: Reconstruction,
  options: SetupOptions,
): SumsSetup | Refusal {
  const delay = reconstruction.delay.samples;
  const { series, present } = usedSamples(record, spreadTarget(record, options.seed));
  const asked = options.maximumDimension ?? DEFAULT_DIMENSIONS;
  // Beyond two vectors' span of independence, vectors of the largest dimension must still be most of the record.
  let dimensions = asked;
  let valid = completeVectors(present, delay, dimensions);
  const enough = () => count(valid) >= Math.max(FEWEST_VECTORS, present.length / 2);
  while (dimensions > 1 && !enough()) valid = completeVectors(present, delay, --dimensions);
  if (dimensions < Math.min(asked, FEWEST_DIMENSIONS) || !enough())
    return refusal(
      'TOO_SHORT',
      `With a delay of ${delay} samples, ${record.count} samples hold enough complete vectors for ${dimensions} embedding ${dimensions === 1 ? 'dimension' : 'dimensions'} only; ${FEWEST_DIMENSIONS} are needed to see a dimension settle.`,
      `Record at least ${2 * (FEWEST_DIMENSIONS - 1) * delay + FEWEST_VECTORS} samples without a gap.`,
      { delay, count: record.count, dimensions },
    );
  const span = (dimensions - 1) * delay;
  // Vectors that share samples are close by construction, however long the correlations last.
  const exclusion = Math.max(
    reconstruction.theilerWindow.samples,
    Math.min(span, Math.floor(present.length / 10)),
  );
  const { low, high } = extremes(series, present);
  const range = high - low;
  return {
    series,
    valid,
    delay,
    dimensions,
    exclusion,
    smallestExponent: smallestExponent(range),
    blocks: drawReferences(valid, options.references ?? DEFAULT_REFERENCES, options.seed),
    range,
    samples: series.length,
  };
}

/** The grid's largest edge, 2^(e + 15)·1.75, is the first at or above the range. */
export function smallestExponent(range: number): number {
  let exponent = 0;
  while (powerOfTwo(exponent) * 1.75 < range) exponent++;
  while (exponent > -900 && powerOfTwo(exponent - 1) * 1.75 >= range) exponent--;
  return exponent - 15;
}

/**
 * The target channel. Values on a lattice of step q are spread evenly over ±q/2: sums of lattice points jump
 * at multiples of q, which local slopes would show as structure. The spread adds q²/12 to the noise
 * variance, as rounding did.
 */
export function spreadTarget(record: PreparedRecord, seed: number): Float64Array {
  const { count: n, target, scaled } = record;
  const series = scaled.slice(target * n, (target + 1) * n);
  const step = spreadStep(record);
  if (step > 0) {
    const random = createRandom(seed, 31);
    for (let t = 0; t < n; t++) if (record.present[t]) series[t]! += step * (random.uniform() - 0.5);
  }
  return series;
}

/** Step of the lattice in standard deviations; 0 when there is none. */
export function spreadStep(record: PreparedRecord): number {
  const std = record.stds[record.target]!;
  return std > 0 ? record.resolutionStep / std : 0;
}

function usedSamples(record: PreparedRecord, whole: Float64Array) {
  const n = record.count;
  if (n <= MOST_SAMPLES) return { series: whole, present: record.present };
  const length = Math.floor(MOST_SAMPLES / STRETCHES);
  // One missing sample between stretches: no vector bridges two of them.
  const series = new Float64Array(STRETCHES * (length + 1));
  const present = new Uint8Array(series.length);
  for (let s = 0; s < STRETCHES; s++) {
    const from = Math.floor((s * (n - length)) / (STRETCHES - 1));
    series.set(whole.subarray(from, from + length), s * (length + 1));
    present.set(record.present.subarray(from, from + length), s * (length + 1));
  }
  return { series, present };
}

/** 1 where the samples t … t + (dimensions − 1)·delay lie in one unbroken run. */
export function completeVectors(present: Uint8Array, delay: number, dimensions: number): Uint8Array {
  const span = (dimensions - 1) * delay;
  const valid = new Uint8Array(Math.max(0, present.length - span));
  let run = 0;
  for (let t = 0; t < present.length; t++) {
    run = present[t] ? run + 1 : 0;
    if (run > span) valid[t - span] = 1;
  }
  return valid;
}

export function drawReferences(valid: Uint8Array, wanted: number, seed: number): Int32Array[] {
  const starts: number[] = [];
  for (let t = 0; t < valid.length; t++) if (valid[t]) starts.push(t);
  const number = Math.min(wanted, starts.length);
  const order = createRandom(seed, 32).permutation(starts.length).subarray(0, number).sort();
  return Array.from({ length: BLOCKS }, (_, b) =>
    order
      .subarray(Math.floor((b * number) / BLOCKS), Math.floor(((b + 1) * number) / BLOCKS))
      .map((i) => starts[i]!),
  );
}

function count(flags: Uint8Array): number {
  let n = 0;
  for (let t = 0; t < flags.length; t++) n += flags[t]!;
  return n;
}

function extremes(series: Float64Array, present: Uint8Array) {
  let low = Number.POSITIVE_INFINITY;
  let high = Number.NEGATIVE_INFINITY;
  for (let t = 0; t < series.length; t++) {
    if (!present[t]) continue;
    if (series[t]! < low) low = series[t]!;
    if (series[t]! > high) high = series[t]!;
  }
  return { low, high };
}
