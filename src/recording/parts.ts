import { defineTask } from '../base/compute.ts';
import { createRandom, type Random } from '../base/random.ts';

/** Parts of the record that are compared: enough to see a slow change, long enough to see each well. */
export const PARTS = 4;
/**
 * Blocks per part: the longer a block, the less it goes with its neighbours; fewer than 8 could not show
 * whether it still does, and 32 in all have permutations enough.
 */
export const BLOCKS_PER_PART = 8;
/** 999 permutations: smallest p-value 0.001. */
export const PERMUTATIONS = 999;
/** Block means count as correlated at this level: a high one, as missing a correlation costs more. */
const CORRELATED_LEVEL = 0.1;

export interface PartsTaskInput {
  /** The target in standard deviations. */
  readonly series: Float64Array;
  readonly present: Uint8Array;
  /** Shortest block that may be taken for independent of its neighbours, in samples. */
  readonly shortestBlock: number;
  /** 1/e time of the autocorrelation, in samples. */
  readonly correlationTime: number;
  readonly seed: number;
}

/**
 * Means over blocks of length B of a process that forgets like e^(−t/τ) have a correlation of τ/(2B) with
 * their neighbours, so the variance of a part's mean is 1 + τ/B times what independent blocks would give.
 */
export function varianceInflation(count: number, correlationTime: number): number {
  return 1 + (correlationTime * PARTS * BLOCKS_PER_PART) / count;
}

export interface PartsComparison {
  /** Mean and standard deviation of each part, in standard deviations of the record. */
  readonly means: number[];
  readonly stds: number[];
  readonly mean: PartsTest;
  readonly spread: PartsTest;
}

export interface PartsTest {
  /** Share of permutations that part the blocks as strongly; 1 when not measured. */
  readonly pValue: number;
  /** False where blocks are still correlated, so that the p-value may be far too small (never too large). */
  readonly valid: boolean;
  /** False where blocks would be too short to be independent, or too few are there. */
  readonly measured: boolean;
}

/**
 * Are mean and spread the same in four parts? Block means are permuted among the parts, which respects
 * correlations shorter than a block (block permutation; Künsch 1989, Ann. Stat. 17, 1217, on blocks).
 */
export const partsTask = defineTask(
  'recording.parts',
  function* (
    _kernels,
    { series, present, shortestBlock, correlationTime, seed }: PartsTaskInput,
  ): Generator<number, PartsComparison, void> {
    const { means, stds } = partMoments(series, present);
    const inflation = varianceInflation(series.length, correlationTime);
    const mean = yield* compareParts(series, present, shortestBlock, inflation, createRandom(seed, 1), 0);
    const squares = new Float64Array(series.length);
    for (let i = 0; i < series.length; i++) {
      const d = series[i]! - means[Math.floor((i * PARTS) / series.length)]!;
      squares[i] = d * d;
    }
    const spread = yield* compareParts(
      squares,
      present,
      shortestBlock,
      inflation,
      createRandom(seed, 2),
      0.5,
    );
    return { means, stds, mean, spread };
  },
);

function partMoments(series: Float64Array, present: Uint8Array) {
  const means: number[] = [];
  const stds: number[] = [];
  for (let p = 0; p < PARTS; p++) {
    const [from, to] = bounds(series.length, p, PARTS);
    let n = 0;
    let sum = 0;
    for (let i = from; i < to; i++)
      if (present[i]) {
        n++;
        sum += series[i]!;
      }
    const mean = n > 0 ? sum / n : 0;
    let squares = 0;
    for (let i = from; i < to; i++) if (present[i]) squares += (series[i]! - mean) * (series[i]! - mean);
    means.push(mean);
    stds.push(n > 0 ? Math.sqrt(squares / n) : 0);
  }
  return { means, stds };
}

/** [from, to) of piece `k` of `pieces` over n samples. */
export function bounds(n: number, k: number, pieces: number): [number, number] {
  return [Math.floor((k * n) / pieces), Math.floor(((k + 1) * n) / pieces)];
}

function* compareParts(
  values: Float64Array,
  present: Uint8Array,
  shortestBlock: number,
  inflation: number,
  random: Random,
  done: number,
): Generator<number, PartsTest, void> {
  if (values.length / (PARTS * BLOCKS_PER_PART) < shortestBlock)
    return { pValue: 1, valid: false, measured: false };
  const parts = blockMeans(values, present);
  if (parts === undefined) return { pValue: 1, valid: false, measured: false };
  yield done + 0.2;
  const valid = !correlated(parts, random) || farApart(parts);
  yield done + 0.3;
  return { pValue: permutedParts(parts, inflation, random), valid, measured: true };
}

/** How many times the movement within parts their distance must be when blocks are correlated. */
const FAR = 10;

/**
 * A periodic record leaves a regular remainder in its block means, which looks correlated. However slow the
 * movement within parts is, a distance between parts ten times its size is not more of the same: a random
 * walk's own drift from part to part is about six times (means of four stretches of a walk of unit steps
 * range over 1.5 √L, about a line within one it moves by √(L/15)).
 */
function farApart(parts: readonly number[][]): boolean {
  const means = parts.map((part) => part.reduce((sum, v) => sum + v, 0) / part.length);
  const movement = medianOf(
    parts.map((part) => Math.sqrt(aboutLine(part).reduce((sum, v) => sum + v * v, 0) / (part.length - 2))),
  );
  return Math.max(...means) - Math.min(...means) > FAR * movement;
}

/** Mean of each block that is at least half there, part by part; undefined when a part has too few. */
function blockMeans(values: Float64Array, present: Uint8Array): number[][] | undefined {
  const parts: number[][] = [];
  for (let p = 0; p < PARTS; p++) {
    const means: number[] = [];
    for (let b = 0; b < BLOCKS_PER_PART; b++) {
      const [from, to] = bounds(values.length, p * BLOCKS_PER_PART + b, PARTS * BLOCKS_PER_PART);
      let n = 0;
      let sum = 0;
      for (let i = from; i < to; i++)
        if (present[i]) {
          n++;
          sum += values[i]!;
        }
      if (2 * n >= to - from) means.push(sum / n);
    }
    if (means.length < 6) return undefined;
    parts.push(means);
  }
  return parts;
}

/**
 * Do neighbouring blocks still go together? Lag-one autocorrelation of the block means about a straight
 * line in each part (so that a drift does not count as correlation), against permutations within the parts.
 */
function correlated(parts: readonly number[][], random: Random): boolean {
  // What is permuted must be exchangeable: the line comes off first.
  const rests = parts.map(aboutLine);
  const observed = lagOne(rests);
  const trials = 199;
  let atLeast = 1;
  for (let k = 0; k < trials; k++) {
    const shuffled = rests.map((rest) => Array.from(random.permutation(rest.length), (i) => rest[i]!));
    if (lagOne(shuffled) >= observed) atLeast++;
  }
  return atLeast / (trials + 1) <= CORRELATED_LEVEL;
}

/** Pooled over the parts but the most restless one: a jump inside one part does not decide. */
function lagOne(parts: readonly number[][]): number {
  const sums = parts.map((part) => {
    const rest = aboutLine(part);
    let products = 0;
    let squares = rest[0]! * rest[0]!;
    for (let i = 1; i < rest.length; i++) {
      products += rest[i]! * rest[i - 1]!;
      squares += rest[i]! * rest[i]!;
    }
    return { products, squares };
  });
  sums.sort((a, b) => a.squares - b.squares);
  sums.pop();
  const squares = sums.reduce((sum, s) => sum + s.squares, 0);
  return squares > 0 ? sums.reduce((sum, s) => sum + s.products, 0) / squares : 0;
}

function aboutLine(values: readonly number[]): number[] {
  const n = values.length;
  const middle = (n - 1) / 2;
  let mean = 0;
  for (const v of values) mean += v / n;
  let products = 0;
  let squares = 0;
  for (let i = 0; i < n; i++) {
    products += (i - middle) * (values[i]! - mean);
    squares += (i - middle) * (i - middle);
  }
  const slope = products / squares;
  return values.map((v, i) => v - mean - slope * (i - middle));
}

function medianOf(values: number[]): number {
  const sorted = [...values].sort((a, b) => a - b);
  return (sorted[(sorted.length - 1) >> 1]! + sorted[sorted.length >> 1]!) / 2;
}

/** Variance between parts of their block means, ranked among permutations of all blocks. */
function permutedParts(parts: readonly number[][], inflation: number, random: Random): number {
  const all = parts.flat();
  const mean = all.reduce((sum, v) => sum + v, 0) / all.length;
  const between = (order: ArrayLike<number>) => {
    let total = 0;
    let from = 0;
    for (const part of parts) {
      let sum = 0;
      for (let i = from; i < from + part.length; i++) sum += all[order[i]!]! - mean;
      total += (sum * sum) / part.length;
      from += part.length;
    }
    return total;
  };
  const observed = between(Int32Array.from(all, (_, i) => i));
  let atLeast = 1;
  for (let k = 0; k < PERMUTATIONS; k++)
    // Equal block means (a periodic record cut at whole cycles) differ by rounding only: those are ties.
    if (inflation * between(random.permutation(all.length)) >= observed * (1 - 1e-9)) atLeast++;
  return atLeast / (PERMUTATIONS + 1);
}
