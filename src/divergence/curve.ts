import { defineTask } from '../base/compute.ts';
import type { DelayVectors, DivergenceSums, Kernels } from '../base/kernels.ts';
import { createRandom } from '../base/random.ts';
import { followAcrossFlow } from './across-flow.ts';

/** Blocks of reference points, contiguous in time: 19 degrees of freedom for the jackknife. */
export const BLOCKS = 20;
/** Neighbours of a neighbourhood: its mean distance then scatters by about a third, averaged over references. */
const NEIGHBOURS = 10;
/** Pairs of unrelated states for the ceiling: their mean logarithm is known to 0.03. */
const UNRELATED = 2_000;
/** Distances between two yields: some 10 ms of plain JavaScript. The same on every backend, for it orders sums. */
const SLICE = 1_000_000;

export interface CurveInput {
  /** Vectors that can be followed `steps` samples ahead without leaving their segment. */
  readonly vectors: DelayVectors;
  /** Where the target channel begins in `vectors.data`. */
  readonly targetOffset: number;
  /** Ordinals of the reference vectors in time order. */
  readonly references: Int32Array;
  /** Theiler window, samples. */
  readonly exclusion: number;
  readonly steps: number;
  readonly seed: number;
  /**
   * For flows, the largest shift (samples) of one orbit against the other (`followAcrossFlow`); null for maps,
   * whose distances are plain. With a shift, vectors must leave room for it.
   */
  readonly shift: number | null;
}

/** Sums per block of references and step, row-major blocks × (steps + 1), distances in standard deviations. */
export interface CurveSums {
  readonly steps: number;
  /**
   * Σ ln of the distance of nearest neighbours (Rosenstein, Collins & De Luca 1993): between orbits for flows
   * (`followAcrossFlow`), Euclidean for maps.
   */
  readonly nearest: DivergenceSums;
  /** The same with the plain Euclidean distance at equal times. */
  readonly plain: DivergenceSums;
  /** Σ ln of the mean difference over the neighbourhood, target sample only (Kantz 1994). */
  readonly neighbourhood: DivergenceSums;
  /** Mean ln distance of unrelated states, and ln of the mean difference of their target samples. */
  readonly ceiling: number;
  readonly neighbourhoodCeiling: number;
}

/**
 * How differences of neighbouring states grow: by nearest neighbours (Rosenstein, Collins & De Luca 1993, Physica D
 * 65, 117) and by neighbourhoods (Kantz 1994, Phys. Lett. A 185, 77), in one search. Reusable on surrogates.
 */
export const divergenceCurveTask = defineTask(
  'divergence.curve',
  function* (kernels: Kernels, input: CurveInput): Generator<number, CurveSums, void> {
    const { vectors, references, exclusion, steps, targetOffset } = input;
    const { data, starts, offsets } = vectors;
    const width = steps + 1;
    const nearest = emptySums(width);
    const plain = input.shift === null ? nearest : emptySums(width);
    const neighbourhood = emptySums(width);
    const slice = Math.max(1, Math.floor(SLICE / (width * (offsets.length + NEIGHBOURS))));
    const index = kernels.neighbourIndex(vectors, 'euclidean');
    try {
      yield 0.05;
      const blockOf = (b: number) => Math.floor((b * references.length) / BLOCKS);
      // Whole blocks where several fit into a slice, parts of one where it does not.
      const together = Math.max(1, Math.floor(slice / Math.max(1, blockOf(1))));
      for (let b = 0; b < BLOCKS; b += together) {
        const end = blockOf(Math.min(BLOCKS, b + together));
        const most = together > 1 ? end - blockOf(b) : slice;
        for (let from = blockOf(b); from < end; from += most) {
          const part = references.slice(from, Math.min(end, from + most));
          const bounds =
            together > 1
              ? Int32Array.from(
                  { length: Math.min(together, BLOCKS - b) + 1 },
                  (_, i) => blockOf(b + i) - from,
                )
              : Int32Array.of(0, part.length);
          const found = index.nearest(part, NEIGHBOURS, exclusion);
          add(nearest, b, followNearest(kernels, input, part, found.indices, bounds));
          if (plain !== nearest)
            add(plain, b, followNearest(kernels, { ...input, shift: null }, part, found.indices, bounds));
          add(neighbourhood, b, followNeighbourhood(kernels, input, part, found.indices, bounds));
          yield 0.05 + (0.95 * from) / references.length;
        }
      }
    } finally {
      index.close();
    }
    // Unrelated states: partners drawn at random from outside the window.
    const random = createRandom(input.seed, 41);
    const first: number[] = [];
    const second: number[] = [];
    for (let tries = 0; tries < 4 * UNRELATED && first.length < UNRELATED; tries++) {
      const [i, j] = [starts[random.integer(starts.length)]!, starts[random.integer(starts.length)]!];
      if (Math.abs(i - j) <= exclusion) continue;
      first.push(i);
      second.push(j);
    }
    const all = Int32Array.of(0, first.length);
    const far = followPairs(kernels, { ...input, steps: 0 }, first, second, all);
    const groups = Math.floor(first.length / NEIGHBOURS);
    const farTarget = kernels.neighbourhoodDivergence({
      data,
      references: Int32Array.from({ length: groups }, (_, g) => first[g * NEIGHBOURS]! + targetOffset),
      rowStarts: Int32Array.from({ length: groups + 1 }, (_, g) => g * NEIGHBOURS),
      neighbours: Int32Array.from(second.slice(0, groups * NEIGHBOURS), (j) => j + targetOffset),
      lengths: new Int32Array(groups * NEIGHBOURS),
      steps: 0,
      blockStarts: Int32Array.of(0, groups),
    });
    const mean = (s: DivergenceSums) => (s.counts[0]! > 0 ? s.logSums[0]! / s.counts[0]! : 0);
    return {
      steps,
      nearest,
      plain,
      neighbourhood,
      ceiling: mean(far),
      neighbourhoodCeiling: mean(farTarget),
    };
  },
);

function emptySums(width: number): DivergenceSums {
  return { logSums: new Float64Array(BLOCKS * width), counts: new Float64Array(BLOCKS * width) };
}

/** Adds the sums of one block or of several from `block` on. */
function add(into: DivergenceSums, block: number, sums: DivergenceSums): void {
  const at = (block * into.logSums.length) / BLOCKS;
  for (let s = 0; s < sums.logSums.length; s++) {
    into.logSums[at + s]! += sums.logSums[s]!;
    into.counts[at + s]! += sums.counts[s]!;
  }
}

function followNearest(
  kernels: Kernels,
  input: CurveInput,
  part: Int32Array,
  found: Int32Array,
  bounds: Int32Array,
) {
  const { starts } = input.vectors;
  const first: number[] = [];
  const second: number[] = [];
  const blockStarts = new Int32Array(bounds.length);
  for (let b = 0; b + 1 < bounds.length; b++) {
    for (let i = bounds[b]!; i < bounds[b + 1]!; i++) {
      const j = found[i * NEIGHBOURS]!;
      if (j < 0) continue;
      first.push(starts[part[i]!]!);
      second.push(starts[j]!);
    }
    blockStarts[b + 1] = first.length;
  }
  return followPairs(kernels, input, first, second, blockStarts);
}

function followPairs(
  kernels: Kernels,
  { vectors, steps, shift }: CurveInput,
  first: readonly number[],
  second: readonly number[],
  blockStarts: Int32Array,
): DivergenceSums {
  const [a, b] = [Int32Array.from(first), Int32Array.from(second)];
  if (shift !== null) return followAcrossFlow(vectors, a, b, steps, shift, blockStarts);
  return kernels.divergenceSums({
    data: vectors.data,
    first: a,
    second: b,
    lengths: new Int32Array(a.length).fill(steps),
    offsets: vectors.offsets,
    steps,
    blockStarts,
  });
}

function followNeighbourhood(
  kernels: Kernels,
  input: CurveInput,
  part: Int32Array,
  found: Int32Array,
  blockStarts: Int32Array,
) {
  const { data, starts } = input.vectors;
  const { targetOffset, steps } = input;
  const rowStarts = new Int32Array(part.length + 1);
  const neighbours: number[] = [];
  for (let i = 0; i < part.length; i++) {
    for (let k = 0; k < NEIGHBOURS; k++) {
      const j = found[i * NEIGHBOURS + k]!;
      if (j >= 0) neighbours.push(starts[j]! + targetOffset);
    }
    rowStarts[i + 1] = neighbours.length;
  }
  return kernels.neighbourhoodDivergence({
    data,
    references: part.map((r) => starts[r]! + targetOffset),
    rowStarts,
    neighbours: Int32Array.from(neighbours),
    lengths: new Int32Array(neighbours.length).fill(steps),
    steps,
    blockStarts,
  });
}
