import fc from 'fast-check';
import { afterAll, beforeAll, describe, expect, test } from 'vitest';
import type { FalseNeighbourInput, Kernels } from '../../src/base/kernels.ts';
import { createRandom } from '../../src/base/random.ts';
import { allBackends, build, cases, coordinatesOf } from './neighbour-cases.ts';

let backends: readonly Kernels[] = [];
beforeAll(async () => {
  backends = await allBackends();
});
afterAll(() => {
  for (const kernels of backends) kernels.close();
});

/** Every backend's result, after checking that all are the same bits. */
function agreed<T>(run: (kernels: Kernels) => T): T {
  const [first, ...others] = backends.map(run);
  for (const other of others) expect(other).toEqual(first);
  return first as T;
}

describe('packDelayVectors', () => {
  test('equals coordinate by coordinate', () => {
    fc.assert(
      fc.property(cases, (c) => {
        const vectors = build(c);
        expect(agreed((kernels) => kernels.packDelayVectors(vectors))).toEqual(
          Float64Array.from(coordinatesOf(vectors).flat()),
        );
      }),
    );
  });

  test('starts may repeat and come in any order', () => {
    const vectors = {
      data: Float64Array.of(1, 2, 3, 4),
      starts: Int32Array.of(3, 1, 1),
      offsets: Int32Array.of(0, -1),
    };
    expect([...agreed((kernels) => kernels.packDelayVectors(vectors))]).toEqual([4, 3, 2, 1, 2, 1]);
  });
});

/** The definitions, written over plain objects. */
function bruteFalseNeighbours(input: FalseNeighbourInput) {
  const { vectors, neighbours, distances, nextOffset, threshold, judgeableDistance } = input;
  const next = (i: number) => vectors.data[vectors.starts[i]! + nextOffset]!;
  const pairs = [...neighbours]
    .map((j, i) => ({ j, distance: distances[i]!, step: j < 0 ? Number.NaN : Math.abs(next(i) - next(j)) }))
    .filter(({ j, distance, step }) => j >= 0 && distance > 0 && Number.isFinite(step));
  const judged = pairs.filter(({ distance }) => distance <= judgeableDistance);
  return {
    judged: judged.length,
    falseNeighbours: judged.filter(({ distance, step }) => step > threshold * distance).length,
    expansionSum: pairs.reduce((sum, p) => sum + Math.max(p.step, p.distance) / p.distance, 0),
    stepSum: pairs.reduce((sum, p) => sum + p.step, 0),
    pairs: pairs.length,
  };
}

describe('falseNeighbourCounts', () => {
  test('all backends equal the definition, bit for bit', () => {
    fc.assert(
      fc.property(cases, fc.integer({ min: -1, max: 30 }), fc.nat(3), (c, exclusion, back) => {
        const whole = build({ ...c, kind: c.kind === 'largest' ? 'random' : c.kind });
        const vectors = { ...whole, starts: whole.starts.filter((t) => t >= back) };
        const { indices, distances } = agreed((kernels) => {
          const index = kernels.neighbourIndex(vectors, 'maximum');
          const found = index.nearest(
            vectors.starts.map((_, i) => i),
            1,
            exclusion,
          );
          index.close();
          return found;
        });
        // The next coordinate runs into the gap of the record at some points: those pairs are left out.
        const input = {
          vectors,
          neighbours: indices,
          distances,
          nextOffset: -back,
          threshold: 1.5,
          judgeableDistance: 0.4,
        };
        expect(agreed((kernels) => kernels.falseNeighbourCounts(input))).toEqual(bruteFalseNeighbours(input));
      }),
    );
  });

  test('exact: a ramp unfolded by its next coordinate', () => {
    // x_t = t: every pair of neighbours at distance 1 has |Δ next| = 1.
    const data = Float64Array.from({ length: 10 }, (_, i) => i);
    const input = {
      vectors: { data, starts: Int32Array.of(1, 2, 3, 4), offsets: Int32Array.of(0) },
      neighbours: Int32Array.of(1, 0, 3, -1),
      distances: Float64Array.of(1, 1, 1, Number.POSITIVE_INFINITY),
      nextOffset: -1,
      threshold: 0.5,
      judgeableDistance: Number.POSITIVE_INFINITY,
    };
    expect(agreed((kernels) => kernels.falseNeighbourCounts(input))).toEqual({
      judged: 3,
      falseNeighbours: 3,
      expansionSum: 3,
      stepSum: 3,
      pairs: 3,
    });
    // Equal to the threshold is not above it; too far apart to be judged still counts for Cao's sums.
    expect(
      agreed((kernels) => kernels.falseNeighbourCounts({ ...input, threshold: 1 })).falseNeighbours,
    ).toBe(0);
    const far = agreed((kernels) => kernels.falseNeighbourCounts({ ...input, judgeableDistance: 0.9 }));
    expect([far.judged, far.pairs]).toEqual([0, 3]);
  });
});

describe('jointCounts', () => {
  test('all backends equal a count over pairs', () => {
    fc.assert(
      fc.property(
        fc.integer({ min: 2, max: 128 }),
        fc.nat(400),
        fc.array(fc.nat(450), { maxLength: 5 }),
        fc.nat(1000),
        (bins, length, lags, seed) => {
          const random = createRandom(seed);
          const symbols = Uint8Array.from({ length }, () =>
            random.integer(10) === 0 ? 255 : random.integer(bins),
          );
          const expected = new Float64Array(lags.length * bins * bins);
          lags.forEach((lag, l) => {
            for (let t = 0; t + lag < length; t++)
              if (symbols[t] !== 255 && symbols[t + lag] !== 255)
                expected[(l * bins + symbols[t]!) * bins + symbols[t + lag]!]! += 1;
          });
          const before = symbols.slice();
          const input = { symbols, bins, lags: Int32Array.from(lags) };
          expect(agreed((kernels) => kernels.jointCounts(input))).toEqual(expected);
          expect(symbols).toEqual(before);
        },
      ),
    );
  });

  test('exact: the lag-0 table is diagonal, and every pair present is counted once', () => {
    const symbols = Uint8Array.of(0, 1, 2, 2, 255, 1, 0);
    const counts = agreed((kernels) =>
      kernels.jointCounts({ symbols, bins: 3, lags: Int32Array.of(0, 1, 6) }),
    );
    expect([...counts.subarray(0, 9)]).toEqual([2, 0, 0, 0, 2, 0, 0, 0, 2]);
    expect([...counts.subarray(9, 18)]).toEqual([0, 1, 0, 1, 0, 1, 0, 0, 1]);
    expect([...counts.subarray(18)]).toEqual([1, 0, 0, 0, 0, 0, 0, 0, 0]);
  });
});
