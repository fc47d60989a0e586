import fc from 'fast-check';
import { afterAll, beforeAll, describe, expect, test } from 'vitest';
import type {
  DivergenceInput,
  DivergenceSums,
  Kernels,
  NeighbourhoodDivergenceInput,
} from '../../src/base/kernels.ts';
import { createRandom } from '../../src/base/random.ts';
import {
  brute,
  bruteNeighbourhoods,
  build,
  buildNeighbourhoods,
  cases,
  type LogSums,
  normal,
} from './divergence-cases.ts';
import { allBackends, bits, SERIES } from './series.ts';

let backends: readonly Kernels[] = [];
beforeAll(async () => {
  backends = await allBackends();
});
afterAll(() => {
  for (const kernels of backends) kernels.close();
});

/** Each of n factors and products rounds once (2^−53), and the sum of n logarithms as often. */
function expectSums(got: DivergenceSums, expected: LogSums): void {
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
