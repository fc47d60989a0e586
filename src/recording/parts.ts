import { defineTask } from '../base/compute.ts';
import { createRandom, type Random } from '../base/random.ts';

/** Parts of the record that are compared: enough to see a slow change, long enough to see each well. */
export const PARTS = 4;
/** Blocks per part tried, finest first. Fewer than 8 cannot show whether blocks are still correlated. */
export const BLOCKS_PER_PART = [32, 16, 8] as const;
/** 999 permutations: smallest p-value 0.001. */
export const PERMUTATIONS = 999;
/** Block means that look correlated at this level are made of longer blocks. */
const CORRELATED_LEVEL = 0.05;

export interface PartsTaskInput {
  /** The target in standard deviations. */
  readonly series: Float64Array;
  readonly present: Uint8Array;
  /** Shortest block that may be taken for independent of its neighbours, in samples. */
  readonly shortestBlock: number;
  readonly seed: number;
}

export interface PartsComparison {
  /** Mean and standard deviation of each part, in standard deviations of the record. */
  readonly means: number[];
  readonly stds: number[];
  /** null where no block length leaves enough blocks that are independent. */
  readonly meanPValue: number | null;
  readonly spreadPValue: number | null;
}

/**
 * Are mean and spread the same in four parts? Block means are permuted among the parts, which respects
 * correlations shorter than a block (block permutation; Künsch 1989, Ann. Stat. 17, 1217, on blocks).
 */
export const partsTask = defineTask(
  'recording.parts',
  function* (
    _kernels,
    { series, present, shortestBlock, seed }: PartsTaskInput,
  ): Generator<number, PartsComparison, void> {
    const { means, stds } = partMoments(series, present);
    const meanPValue = compareParts(series, present, shortestBlock, createRandom(seed, 1));
    yield 0.5;
    const squares = new Float64Array(series.length);
    for (let i = 0; i < series.length; i++) {
      const d = series[i]! - means[Math.floor((i * PARTS) / series.length)]!;
      squares[i] = d * d;
    }
    const spreadPValue = compareParts(squares, present, shortestBlock, createRandom(seed, 2));
    return { means, stds, meanPValue, spreadPValue };
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

function compareParts(
  values: Float64Array,
  present: Uint8Array,
  shortestBlock: number,
  random: Random,
): number | null {
  for (const perPart of BLOCKS_PER_PART) {
    if (values.length / (PARTS * perPart) < shortestBlock) continue;
    const parts = blockMeans(values, present, perPart);
    if (parts === undefined || correlated(parts, random)) continue;
    return permutedParts(parts, random);
  }
  return null;
}

/** Mean of each block that is at least half there, part by part; undefined when a part has too few. */
function blockMeans(values: Float64Array, present: Uint8Array, perPart: number): number[][] | undefined {
  const parts: number[][] = [];
  for (let p = 0; p < PARTS; p++) {
    const means: number[] = [];
    for (let b = 0; b < perPart; b++) {
      const [from, to] = bounds(values.length, p * perPart + b, PARTS * perPart);
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
 * line in each part (so that a drift does not count as correlation), median over the parts (so that one
 * part with a jump in it does not decide), against permutations within the parts.
 */
function correlated(parts: readonly number[][], random: Random): boolean {
  const observed = medianOf(parts.map(lagOne));
  const trials = 199;
  let atLeast = 1;
  for (let k = 0; k < trials; k++) {
    const shuffled = parts.map((part) => {
      // The line is taken off before shuffling: what is permuted must be what is exchangeable.
      const rest = aboutLine(part);
      return Array.from(random.permutation(rest.length), (i) => rest[i]!);
    });
    if (medianOf(shuffled.map(lagOne)) >= observed) atLeast++;
  }
  return atLeast / (trials + 1) <= CORRELATED_LEVEL;
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

function lagOne(values: readonly number[]): number {
  const rest = aboutLine(values);
  let products = 0;
  let squares = rest[0]! * rest[0]!;
  for (let i = 1; i < rest.length; i++) {
    products += rest[i]! * rest[i - 1]!;
    squares += rest[i]! * rest[i]!;
  }
  return squares > 0 ? products / squares : 0;
}

function medianOf(values: number[]): number {
  const sorted = [...values].sort((a, b) => a - b);
  return (sorted[(sorted.length - 1) >> 1]! + sorted[sorted.length >> 1]!) / 2;
}

/** Variance between parts of their block means, ranked among permutations of all blocks. */
function permutedParts(parts: readonly number[][], random: Random): number {
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
    if (between(random.permutation(all.length)) >= observed * (1 - 1e-9)) atLeast++;
  return atLeast / (PERMUTATIONS + 1);
}
