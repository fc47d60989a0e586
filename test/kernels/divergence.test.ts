import fc from 'fast-check';
import { afterAll, beforeAll, describe, expect, test } from 'vitest';
import type {
  DivergenceInput,
  DivergenceSums,
  Kernels,
  NeighbourhoodDivergenceInput,
} from '../../src/base/kernels.ts';
import { createRandom, type Random } from '../../src/base/random.ts';
import { allBackends, bits, SERIES, type SeriesKind, seriesKinds } from './series.ts';

let backends: readonly Kernels[] = [];
beforeAll(async () => {
  backends = await allBackends();
});
afterAll(() => {
  for (const kernels of backends) kernels.close();
});

interface Case {
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

const cases: fc.Arbitrary<Case> = fc.record({
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

function build(c: Case): DivergenceInput {
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

function buildNeighbourhoods(c: Case): NeighbourhoodDivergenceInput {
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

/** One logarithm a distance; `size` sums the magnitudes, for the rounding error. */
function brute({ data, first, second, lengths, offsets, steps, blockStarts }: DivergenceInput) {
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

function bruteNeighbourhoods(input: NeighbourhoodDivergenceInput) {
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

const empty = (size: number) => ({
  logSums: new Float64Array(size),
  counts: new Float64Array(size),
  sizes: new Float64Array(size),
});

function add(result: ReturnType<typeof empty>, at: number, value: number): void {
  result.logSums[at]! += value;
  result.counts[at]! += 1;
  result.sizes[at]! += 1 + Math.abs(value);
}

const same = (data: Float64Array, i: number, j: number, s: number, offsets: Int32Array) =>
  offsets.every((o) => data[i + s + o] === data[j + s + o]);

/** Each of n factors and products rounds once (2^−53), and the sum of n logarithms as often. */
function expectSums(got: DivergenceSums, expected: ReturnType<typeof empty>): void {
  expect(got.counts).toEqual(expected.counts);
  got.logSums.forEach((sum, i) => {
    const error = 2 ** -53 * (expected.counts[i]! + 8) * (expected.sizes[i]! + 1);
    expect(Math.abs(sum - expected.logSums[i]!)).toBeLessThanOrEqual(error);
  });
}

function expectSameBits(results: readonly DivergenceSums[]): void {
  for (const result of results) {
    expect(bits(result.logSums)).toBe(bits(results[0]!.logSums));
    expect(bits(result.counts)).toBe(bits(results[0]!.counts));
    expect(result.logSums.every(Number.isFinite)).toBe(true);
  }
}

/** Halving or dividing by 64 loses bits of subnormal values in brute force. */
const normal = (c: Case) => c.kind !== 'subnormal';

describe('the same bits on every backend, and brute force to rounding', () => {
  test('pairs', () => {
    fc.assert(
      fc.property(cases, (c) => {
        const input = build(c);
        const results = backends.map((kernels) => kernels.divergenceSums(input));
        expectSameBits(results);
        if (normal(c)) expectSums(results[0]!, brute(input));
      }),
      { numRuns: 300 },
    );
  });

  test('neighbourhoods', () => {
    fc.assert(
      fc.property(cases, (c) => {
        const input = buildNeighbourhoods(c);
        const results = backends.map((kernels) => kernels.neighbourhoodDivergence(input));
        expectSameBits(results);
        if (normal(c)) expectSums(results[0]!, bruteNeighbourhoods(input));
      }),
      { numRuns: 300 },
    );
  });

  test('products that leave the range of doubles thousands of times', () => {
    const length = 3000;
    const data = SERIES.wide(7, length);
    const count = 2500;
    const random = createRandom(1);
    const input: DivergenceInput = {
      data,
      first: Int32Array.from({ length: count }, () => random.integer(length - 20)),
      second: Int32Array.from({ length: count }, () => random.integer(length - 20)),
      lengths: new Int32Array(count).fill(19),
      offsets: Int32Array.of(0),
      steps: 19,
      blockStarts: Int32Array.of(0, count),
    };
    const results = backends.map((kernels) => kernels.divergenceSums(input));
    expectSameBits(results);
    expectSums(results[0]!, brute(input));
    const apart = { ...input, data: data.map((x) => 1e-60 * x) };
    expectSums(backends[0]!.divergenceSums(apart), brute(apart));
  });
});

describe('closed forms', () => {
  const growth = 0.05;
  const steps = 100;
  /** A resting orbit, then orbits at distances c·exp(growth·step) from it. */
  const orbits = (starts: readonly number[]) => {
    const data = new Float64Array((starts.length + 1) * (steps + 1));
    starts.forEach((c, k) => {
      for (let s = 0; s <= steps; s++) data[(k + 1) * (steps + 1) + s] = c * Math.exp(growth * s);
    });
    return data;
  };

  test('exact: pairs that part as c·exp(λs) give Σ ln c + count·λs', () => {
    const starts = [1e-6, 3e-6, -2e-5, 4e-7, 1e-8];
    const input: DivergenceInput = {
      data: orbits(starts),
      first: new Int32Array(5),
      second: Int32Array.from({ length: 5 }, (_, k) => (k + 1) * (steps + 1)),
      lengths: new Int32Array(5).fill(steps),
      offsets: Int32Array.of(0),
      steps,
      blockStarts: Int32Array.of(0, 5),
    };
    const level = starts.reduce((a, c) => a + Math.log(Math.abs(c)), 0);
    for (const kernels of backends) {
      const { logSums, counts } = kernels.divergenceSums(input);
      for (let s = 0; s <= steps; s++) {
        expect(counts[s]).toBe(5);
        expect(Math.abs(logSums[s]! - (level + 5 * growth * s))).toBeLessThan(1e-12);
      }
    }
  });

  test('exact: a neighbourhood gives ln of the mean distance', () => {
    const starts = [1e-6, -3e-6, 5e-6];
    const input: NeighbourhoodDivergenceInput = {
      data: orbits(starts),
      references: Int32Array.of(0),
      rowStarts: Int32Array.of(0, 3),
      neighbours: Int32Array.from({ length: 3 }, (_, k) => (k + 1) * (steps + 1)),
      lengths: Int32Array.of(steps, steps, 40),
      steps,
      blockStarts: Int32Array.of(0, 1),
    };
    for (const kernels of backends) {
      const { logSums, counts } = kernels.neighbourhoodDivergence(input);
      for (let s = 0; s <= steps; s++) {
        expect(counts[s]).toBe(1);
        const mean = s <= 40 ? 3e-6 : 2e-6;
        expect(Math.abs(logSums[s]! - (Math.log(mean) + growth * s))).toBeLessThan(1e-13);
      }
    }
  });

  test('pairs that coincide are left out, pairs of one step only count at lead 0', () => {
    const input: DivergenceInput = {
      data: Float64Array.of(1, 2, 3, 1, 2, 5),
      first: Int32Array.of(0, 0, 1, 2, 0),
      second: Int32Array.of(3, 3, 2, 5, 1),
      lengths: Int32Array.of(2, 1, 0, 0, 2),
      offsets: Int32Array.of(0),
      steps: 2,
      blockStarts: Int32Array.of(0, 5),
    };
    for (const kernels of backends) {
      const { logSums, counts } = kernels.divergenceSums(input);
      // Apart at lead 0: |2−3|, |3−5|, |1−2|; at lead 1: |2−3|; at lead 2: |3−5|, |3−1|.
      expect([...counts]).toEqual([3, 1, 2]);
      expect(logSums[0]).toBeCloseTo(Math.log(2), 14);
      expect(logSums[1]).toBe(0);
      expect(logSums[2]).toBeCloseTo(Math.log(4), 14);
    }
  });
});

test('units twice as large add count · ln 2; the sum over blocks is the sum over all', () => {
  fc.assert(
    fc.property(cases, (c) => {
      const input = build(c);
      fc.pre(c.kind !== 'largest' && normal(c));
      const kernels = backends[0]!;
      const { logSums, counts } = kernels.divergenceSums(input);
      const larger = kernels.divergenceSums({ ...input, data: input.data.map((x) => 2 * x) });
      expect(larger.counts).toEqual(counts);
      const size = (i: number) => 1e-13 * (1 + Math.abs(logSums[i]!) + 400 * counts[i]!);
      larger.logSums.forEach((sum, i) => {
        expect(Math.abs(sum - logSums[i]! - counts[i]! * Math.LN2)).toBeLessThan(size(i));
      });
      const whole = kernels.divergenceSums({
        ...input,
        blockStarts: Int32Array.of(0, input.first.length),
      });
      const width = c.steps + 1;
      for (let s = 0; s < width; s++) {
        let sum = 0;
        let count = 0;
        for (let b = 0; b < c.blocks; b++) {
          sum += logSums[b * width + s]!;
          count += counts[b * width + s]!;
        }
        expect(count).toBe(whole.counts[s]);
        expect(Math.abs(sum - whole.logSums[s]!)).toBeLessThan(1e-13 * (1 + 400 * count));
      }
    }),
    { numRuns: 60 },
  );
});
