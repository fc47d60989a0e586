import { defineTask } from '../base/compute.ts';
import type { DelayVectors, Kernels } from '../base/kernels.ts';
import { createRandom } from '../base/random.ts';
import { BLOCKS_PER_PART, bounds, PARTS, PERMUTATIONS, varianceInflation } from './parts.ts';

export interface CrossForecastInput {
  /** Vectors whose target, `targetOffset` from their start, exists. */
  readonly vectors: DelayVectors;
  /** Samples in the record: blocks are cut by time. */
  readonly count: number;
  readonly targetOffset: number;
  /** Theiler window, samples. */
  readonly exclusion: number;
  /** 1/e time of the autocorrelation, in samples. */
  readonly correlationTime: number;
  readonly seed: number;
}

export interface CrossForecast {
  /** Mean absolute error of forecasting part j from part i, row-major, in standard deviations. */
  readonly errors: number[];
  /** Mean over i ≠ j and over i = j. */
  readonly across: number;
  readonly within: number;
  readonly pValue: number;
}

const BLOCKS = PARTS * BLOCKS_PER_PART;
/** Reference points per block and library vectors per block at most: 32 × 32 × 16 local fits in all. */
const REFERENCES = 16;
const LIBRARY = 400;
/** Fewest delay vectors of a block: twice the coefficients of a local map of nine coordinates. */
export const FEWEST_VECTORS = 20;
const RIDGE = 1e-6;

/**
 * Mutual forecast errors of four parts (Schreiber 1997, Phys. Rev. Lett. 78, 843), by locally linear maps.
 * Every reference point is forecast from each of 32 blocks once; a part forecasts by that one of its blocks
 * that comes closest. The excess of errors across parts is then ranked among permutations of the blocks
 * over the parts, which costs no further forecast. Undefined when blocks have too few vectors.
 */
export const crossForecastTask = defineTask(
  'recording.crossForecast',
  function* (
    kernels: Kernels,
    input: CrossForecastInput,
  ): Generator<number, CrossForecast | undefined, void> {
    const { vectors, count, targetOffset } = input;
    const blocks = blockOrdinals(vectors.starts, count);
    if (blocks === undefined) return undefined;
    const references = Int32Array.from(blocks.flatMap((b) => Array.from(spread(b, REFERENCES))));
    const times = references.map((r) => vectors.starts[r]!);
    const truth = Float64Array.from(times, (t) => vectors.data[t + targetOffset]!);
    const coordinates = kernels.packDelayVectors({ ...vectors, starts: times });
    const { low, high } = extremes(truth);

    // Row-major references × blocks.
    const errors = new Float64Array(references.length * BLOCKS);
    const distances = new Float64Array(references.length * BLOCKS);
    const m = vectors.offsets.length;
    for (let b = 0; b < BLOCKS; b++) {
      const library: DelayVectors = {
        ...vectors,
        starts: spread(blocks[b]!, LIBRARY).map((i) => vectors.starts[i]!),
      };
      const k = Math.min(64, 2 * (m + 1), library.starts.length >> 1);
      const index = kernels.neighbourIndex(library, 'euclidean');
      try {
        const chunk = 128;
        for (let from = 0; from < references.length; from += chunk) {
          const to = Math.min(from + chunk, references.length);
          const queries = coordinates.slice(from * m, to * m);
          const found = index.nearestTo(
            { coordinates: queries, times: times.slice(from, to) },
            k,
            input.exclusion,
          );
          const { predictions } = kernels.localFits({
            vectors: library,
            targetOffsets: Int32Array.of(targetOffset),
            queries,
            neighbours: found,
            order: 1,
            weights: 'tricube',
            ridge: RIDGE,
          });
          for (let i = from; i < to; i++) {
            const p = predictions[i - from]!;
            const forecast = Number.isNaN(p) ? 0 : Math.max(low, Math.min(high, p));
            errors[i * BLOCKS + b] = Math.abs(forecast - truth[i]!);
            // Infinite where the exclusion leaves fewer than k: such a block comes last.
            distances[i * BLOCKS + b] = found.distances[(i - from) * k + k - 1]!;
          }
          yield (0.7 * (b + from / references.length)) / BLOCKS;
        }
      } finally {
        index.close();
      }
    }
    const inflation = Math.sqrt(varianceInflation(count, input.correlationTime));
    return yield* ranked(errors, distances, references.length, inflation, input.seed);
  },
);

/** Blocks from nearest to farthest for each reference point; then every assignment is a short walk. */
function* ranked(
  errors: Float64Array,
  distances: Float64Array,
  references: number,
  inflation: number,
  seed: number,
) {
  const order = new Uint8Array(references * BLOCKS);
  const numbers = Array.from({ length: BLOCKS }, (_, b) => b);
  for (let i = 0; i < references; i++) {
    const row = distances.subarray(i * BLOCKS, (i + 1) * BLOCKS);
    // Not by a difference: Infinity − Infinity is not a number.
    const compare = (a: number, b: number) => (row[a]! < row[b]! ? -1 : row[a]! > row[b]! ? 1 : a - b);
    order.set([...numbers].sort(compare), i * BLOCKS);
  }
  const observed = partErrors(errors, order, references, numbers);
  const excess = ({ across, within }: Sums) => across - within;
  const random = createRandom(seed, 3);
  let atLeast = 1;
  for (let k = 0; k < PERMUTATIONS; k++) {
    const trial = partErrors(errors, order, references, random.permutation(BLOCKS));
    if (inflation * excess(trial) >= excess(observed)) atLeast++;
    if (k % 20 === 0) yield 0.7 + (0.3 * k) / PERMUTATIONS;
  }
  return { ...observed, pValue: atLeast / (PERMUTATIONS + 1) };
}

type Sums = Pick<CrossForecast, 'errors' | 'across' | 'within'>;

/** @param slots place of each block: part = ⌊slot / BLOCKS_PER_PART⌋ */
function partErrors(
  errors: Float64Array,
  order: Uint8Array,
  references: number,
  slots: ArrayLike<number>,
): Sums {
  const sums = new Float64Array(PARTS * PARTS);
  const counts = new Float64Array(PARTS * PARTS);
  const perBlock = references / BLOCKS;
  for (let i = 0; i < references; i++) {
    const slot = slots[Math.floor(i / perBlock)]!;
    const place = slot % BLOCKS_PER_PART;
    const own = Math.floor(slot / BLOCKS_PER_PART);
    let found = 0;
    for (let j = 0; found !== (1 << PARTS) - 1 && j < BLOCKS; j++) {
      const block = order[i * BLOCKS + j]!;
      // Its own block may not forecast it; one block of every other part is left out too, so that no part
      // has more to choose from.
      if (slots[block]! % BLOCKS_PER_PART === place) continue;
      const part = Math.floor(slots[block]! / BLOCKS_PER_PART);
      if (found & (1 << part)) continue;
      found |= 1 << part;
      sums[part * PARTS + own]! += errors[i * BLOCKS + block]!;
      counts[part * PARTS + own]!++;
    }
  }
  let across = 0;
  let within = 0;
  const table = Array.from(sums, (sum, cell) => sum / counts[cell]!);
  for (let i = 0; i < PARTS; i++)
    for (let j = 0; j < PARTS; j++) {
      if (i === j) within += table[i * PARTS + j]! / PARTS;
      else across += table[i * PARTS + j]! / (PARTS * (PARTS - 1));
    }
  return { errors: table, across, within };
}

/** Ordinals of the vectors of each block of time; undefined when one has too few. */
function blockOrdinals(starts: Int32Array, count: number): Int32Array[] | undefined {
  const blocks: Int32Array[] = [];
  let i = 0;
  for (let b = 0; b < BLOCKS; b++) {
    const [, to] = bounds(count, b, BLOCKS);
    const from = i;
    while (i < starts.length && starts[i]! < to) i++;
    if (i - from < FEWEST_VECTORS) return undefined;
    blocks.push(Int32Array.from({ length: i - from }, (_, k) => from + k));
  }
  return blocks;
}

/** At most `cap` elements, evenly spread. */
function spread(list: Int32Array, cap: number): Int32Array {
  if (list.length <= cap) return list;
  return Int32Array.from({ length: cap }, (_, i) => list[Math.floor(((i + 0.5) * list.length) / cap)]!);
}

function extremes(values: Float64Array) {
  let low = Number.POSITIVE_INFINITY;
  let high = Number.NEGATIVE_INFINITY;
  for (const v of values) {
    if (v < low) low = v;
    if (v > high) high = v;
  }
  return { low, high };
}
