import { type Compute, defineTask } from '../base/compute.ts';
import { CORRELATION_EDGES, type Kernels } from '../base/kernels.ts';
import type { SumsSetup } from './setup.ts';

export interface SumsTaskInput {
  readonly series: Float64Array;
  readonly valid: Uint8Array;
  readonly delay: number;
  readonly dimensions: number;
  readonly exclusion: number;
  readonly smallestExponent: number;
  /** Start indices of the reference points of one block. */
  readonly references: Int32Array;
  /** A wider exclusion, counted for every fourth reference point; 0: none. */
  readonly wideExclusion: number;
}

/** Pairs closer than each edge, row-major dimensions × 64, and all admissible pairs. */
export interface PairCounts {
  readonly counts: Float64Array;
  readonly pairs: number;
}

export interface BlockSums {
  readonly all: PairCounts;
  /** Every fourth reference point alone, with the plain and the wide exclusion. */
  readonly some: PairCounts;
  readonly wide: PairCounts;
}

/** Every fourth reference point shows whether a wider exclusion changes the slopes: a quarter more work. */
const WIDE_SHARE = 4;
/**
 * Distances classed between two yields: a few milliseconds of compiled code or of plain JavaScript. Counts are
 * whole numbers, so the size of a slice changes no bit.
 */
const SLICE = 8_000_000;
const SLICE_JS = 1_000_000;

/** Correlation sums of one block of reference points (Grassberger & Procaccia 1983, Physica D 9, 189). */
export const correlationSumsTask = defineTask(
  'geometry.correlationSums',
  function* (kernels: Kernels, input: SumsTaskInput): Generator<number, BlockSums, void> {
    const { references, wideExclusion, ...common } = input;
    const some = references.filter((_, i) => i % WIDE_SHARE === 0);
    const rest = references.filter((_, i) => i % WIDE_SHARE !== 0);
    const size = common.dimensions * CORRELATION_EDGES;
    const perSlice = kernels.backend === 'js' ? SLICE_JS : SLICE;
    const slice = Math.max(1, Math.floor(perSlice / (input.valid.length * input.dimensions)));
    const work = references.length + (wideExclusion > 0 ? some.length : 0);
    let done = 0;
    function* sum(points: Int32Array, exclusion: number): Generator<number, PairCounts, void> {
      const counts = new Float64Array(size);
      let pairs = 0;
      for (let from = 0; from < points.length; from += slice) {
        const part = points.slice(from, from + slice);
        const found = kernels.correlationCountsFrom({ ...common, exclusion }, part);
        for (let i = 0; i < size; i++) counts[i]! += found.counts[i]!;
        pairs += found.pairs;
        done += part.length;
        yield done / work;
      }
      return { counts, pairs };
    }
    const first = yield* sum(some, input.exclusion);
    const second = yield* sum(rest, input.exclusion);
    const wide = wideExclusion > 0 ? yield* sum(some, wideExclusion) : { counts: first.counts, pairs: 0 };
    return {
      all: {
        counts: first.counts.map((c, i) => c + second.counts[i]!),
        pairs: first.pairs + second.pairs,
      },
      some: first,
      wide,
    };
  },
);

/** One result per block, in block order. */
export function sumBlocks(setup: SumsSetup, wideExclusion: number, compute: Compute): Promise<BlockSums[]> {
  const { series, valid, delay, dimensions, exclusion, smallestExponent } = setup;
  return compute.map(
    correlationSumsTask,
    setup.blocks.map((references) => ({
      series,
      valid,
      delay,
      dimensions,
      exclusion,
      smallestExponent,
      references,
      wideExclusion,
    })),
  );
}
