import fc from 'fast-check';
import type { DivergenceInput, NeighbourhoodDivergenceInput } from '../../src/base/kernels.ts';
import { createRandom, type Random } from '../../src/base/random.ts';
import { SERIES, type SeriesKind, seriesKinds } from './series.ts';

export interface Case {
  readonly kind: SeriesKind;
  readonly seed: number;
  readonly length: number;
  readonly pairs: number;
  readonly steps: number;
  /** Distance between offsets and their number. */
  readonly delay: number;
  readonly offsets: number;
  readonly blocks: number;
}

export const cases: fc.Arbitrary<Case> = fc.record({
  kind: fc.constantFrom(...seriesKinds),
  seed: fc.nat(1000),
  length: fc.integer({ min: 60, max: 300 }),
  pairs: fc.oneof(fc.integer({ min: 0, max: 9 }), fc.integer({ min: 0, max: 120 })),
  steps: fc.oneof(fc.integer({ min: 0, max: 5 }), fc.integer({ min: 0, max: 40 })),
  delay: fc.oneof(fc.integer({ min: -4, max: 4 }), fc.integer({ min: -30, max: 30 })),
  offsets: fc.integer({ min: 1, max: 6 }),
  blocks: fc.integer({ min: 1, max: 5 }),
});

/** Series with one missing sample, which no pair may reach. */
function seriesOf({ kind, seed, length }: Case): Float64Array {
  const data = SERIES[kind](seed, length);
  data[Math.floor(length / 3)] = Number.NaN;
  return data;
}

function ends(random: Random, total: number, blocks: number): Int32Array {
  const cuts = Array.from({ length: blocks - 1 }, () => random.integer(total + 1));
  return Int32Array.from([0, ...cuts, total].sort((a, b) => a - b));
}

/** How far a point may be followed: every offset inside the data and short of the missing sample. */
function reach(data: Float64Array, start: number, offsets: Int32Array): number {
  let steps = -1;
  while (offsets.every((o) => Number.isFinite(data[start + o + steps + 1] ?? Number.NaN))) steps++;
  return steps;
}

export function build(c: Case): DivergenceInput {
  const data = seriesOf(c);
  const random = createRandom(c.seed, 3);
  const offsets = Int32Array.from({ length: c.offsets }, (_, d) => (d === 0 ? 0 : d * c.delay));
  const usable = Int32Array.from(data.keys()).filter((t) => reach(data, t, offsets) >= 0);
  const count = usable.length === 0 ? 0 : c.pairs;
  const draw = () => usable[random.integer(usable.length)]!;
  const first = Int32Array.from({ length: count }, draw);
  const second = Int32Array.from({ length: count }, draw);
  // Half of the pairs are given up earlier than they must.
  const lengths = first.map((s, p) => {
    const most = Math.min(c.steps, reach(data, s, offsets), reach(data, second[p]!, offsets));
    return random.uniform() < 0.5 ? most : random.integer(most + 1);
  });
  return {
    data,
    first,
    second,
    lengths,
    offsets,
    steps: c.steps,
    blockStarts: ends(random, count, c.blocks),
  };
}

export function buildNeighbourhoods(c: Case): NeighbourhoodDivergenceInput {
  const pairs = build({ ...c, offsets: 1 });
  const random = createRandom(c.seed, 4);
  const count = 1 + random.integer(8);
  // Rows of any length, some empty; the second members of the pairs are the neighbours.
  const rowStarts = ends(random, pairs.second.length, count);
  const { data, steps } = pairs;
  const self = Int32Array.of(0);
  const usable = Int32Array.from(data.keys()).filter((t) => reach(data, t, self) >= 0);
  const references = Int32Array.from({ length: count }, () => usable[random.integer(usable.length)]!);
  const lengths = pairs.lengths.slice();
  for (let r = 0; r < count; r++)
    for (let p = rowStarts[r]!; p < rowStarts[r + 1]!; p++)
      lengths[p] = Math.min(lengths[p]!, reach(data, references[r]!, self));
  return {
    data,
    references,
    rowStarts,
    neighbours: pairs.second,
    lengths,
    steps,
    blockStarts: ends(random, count, c.blocks),
  };
}

/** Half a difference: that of the largest doubles overflows. */
const half = (a: number, b: number) => Math.abs(a / 2 - b / 2);

/** ln of a distance from halves of its components, divided by the largest first: no overflow, no underflow. */
function logDistance(halves: number[]): number {
  const largest = Math.max(...halves);
  return Math.log(largest) + 0.5 * Math.log(halves.reduce((a, h) => a + (h / largest) ** 2, 0)) + Math.LN2;
}

/** One logarithm a distance. */
export function brute({ data, first, second, lengths, offsets, steps, blockStarts }: DivergenceInput) {
  const width = steps + 1;
  const result = empty((blockStarts.length - 1) * width);
  for (let b = 0; b + 1 < blockStarts.length; b++)
    for (let p = blockStarts[b]!; p < blockStarts[b + 1]!; p++)
      for (let s = 0; s <= lengths[p]!; s++) {
        const halves = Array.from(offsets, (o) => {
          const a = data[first[p]! + s + o]!;
          const b = data[second[p]! + s + o]!;
          // Half the smallest double is no double: double the difference instead of halving the values.
          return Math.abs(a) < 1e-300 && Math.abs(b) < 1e-300 ? Math.abs(a - b) / 2 : half(a, b);
        });
        if (halves.every((h) => h === 0) && same(data, first[p]!, second[p]!, s, offsets)) continue;
        add(result, b * width + s, logDistance(halves));
      }
  return result;
}

export function bruteNeighbourhoods(input: NeighbourhoodDivergenceInput) {
  const { data, references, rowStarts, neighbours, lengths, steps, blockStarts } = input;
  const width = steps + 1;
  const result = empty((blockStarts.length - 1) * width);
  for (let b = 0; b + 1 < blockStarts.length; b++)
    for (let r = blockStarts[b]!; r < blockStarts[b + 1]!; r++)
      for (let s = 0; s <= steps; s++) {
        const differences: number[] = [];
        for (let p = rowStarts[r]!; p < rowStarts[r + 1]!; p++)
          if (s <= lengths[p]!)
            differences.push(Math.abs(data[references[r]! + s]! / 64 - data[neighbours[p]! + s]! / 64));
        const mean = differences.reduce((a, d) => a + d, 0) / differences.length;
        if (mean > 0) add(result, b * width + s, Math.log(mean) + Math.log(64));
      }
  return result;
}

/** Sums of one term a distance; `sizes` adds up magnitudes, for the rounding error. */
const empty = (size: number) => ({
  logSums: new Float64Array(size),
  counts: new Float64Array(size),
  sizes: new Float64Array(size),
});

export type LogSums = ReturnType<typeof empty>;

function add(result: LogSums, at: number, value: number): void {
  result.logSums[at]! += value;
  result.counts[at]! += 1;
  result.sizes[at]! += 1 + Math.abs(value);
}

const same = (data: Float64Array, i: number, j: number, s: number, offsets: Int32Array) =>
  offsets.every((o) => data[i + s + o] === data[j + s + o]);

/** Halving or dividing by 64 loses bits of subnormal values in brute force. */
export const normal = (c: Case) => c.kind !== 'subnormal';
