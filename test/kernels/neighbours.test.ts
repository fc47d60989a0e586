import fc from 'fast-check';
import { afterAll, beforeAll, describe, expect, test } from 'vitest';
import type { Kernels, Metric } from '../../src/base/kernels.ts';
import { createRandom } from '../../src/base/random.ts';
import {
  allBackends,
  asQueries,
  bruteNearest,
  bruteWithin,
  build,
  type Case,
  cases,
  coordinatesOf,
} from './neighbour-cases.ts';

let backends: readonly Kernels[] = [];
beforeAll(async () => {
  backends = await allBackends();
});
afterAll(() => {
  for (const kernels of backends) kernels.close();
});

const metrics = fc.constantFrom<Metric>('euclidean', 'maximum');
const exclusions = fc.oneof(fc.constantFrom(-1, 0, 1, 2 ** 31 - 1), fc.integer({ min: 2, max: 700 }));
const neighbourCounts = fc.oneof(fc.integer({ min: 1, max: 12 }), fc.constantFrom(15, 16, 17, 40, 256));

/** A few ordinals, unordered and repeated. */
function someOrdinals(count: number, seed: number): Int32Array {
  const random = createRandom(seed, 1);
  return Int32Array.from({ length: count === 0 ? 0 : 12 }, () => random.integer(count));
}

describe('all backends equal brute force, bit for bit', () => {
  test('k nearest', () => {
    fc.assert(
      fc.property(cases, metrics, neighbourCounts, exclusions, (c, metric, k, exclusion) => {
        const vectors = build(c);
        const queries = someOrdinals(vectors.starts.length, c.seed);
        const expected = bruteNearest(vectors, asQueries(vectors, queries), k, exclusion, metric);
        for (const kernels of backends) {
          const index = kernels.neighbourIndex(vectors, metric);
          expect(index.nearest(queries, k, exclusion), kernels.backend).toEqual(expected);
          index.close();
        }
      }),
      { numRuns: 250 },
    );
  });

  test('within a radius, the radius being a distance that occurs', () => {
    fc.assert(
      fc.property(cases, metrics, fc.nat(60), exclusions, (c, metric, rank, exclusion) => {
        const vectors = build(c);
        const queries = someOrdinals(vectors.starts.length, c.seed);
        const points = asQueries(vectors, queries);
        const near = bruteNearest(vectors, points, 60, exclusion, metric).distances;
        const radius = [...near].filter(Number.isFinite)[rank] ?? 0.5;
        const expected = bruteWithin(vectors, points, radius, exclusion, metric);
        for (const kernels of backends) {
          const index = kernels.neighbourIndex(vectors, metric);
          expect(index.within(queries, radius, exclusion), kernels.backend).toEqual(expected);
          expect(index.withinOf(points, radius, exclusion), kernels.backend).toEqual(expected);
          index.close();
        }
      }),
      { numRuns: 200 },
    );
  });

  test('points given by coordinates, with and without times', () => {
    fc.assert(
      fc.property(
        cases,
        metrics,
        neighbourCounts,
        exclusions,
        fc.boolean(),
        (c, metric, k, exclusion, timed) => {
          const vectors = build(c);
          const m = vectors.offsets.length;
          const random = createRandom(c.seed, 2);
          const known = coordinatesOf(vectors).flat();
          // Between, on and far outside the points.
          const coordinates = Float64Array.from({ length: 9 * m }, (_, i) =>
            i % 3 === 0 ? 1e3 * random.normal() : (known[random.integer(known.length || 1)] ?? 0),
          );
          const queries = timed
            ? { coordinates, times: Int32Array.from({ length: 9 }, () => random.integer(600)) }
            : { coordinates };
          const expected = bruteNearest(vectors, queries, k, exclusion, metric);
          const inRadius = bruteWithin(vectors, queries, 1.5, exclusion, metric);
          for (const kernels of backends) {
            const index = kernels.neighbourIndex(vectors, metric);
            expect(index.nearestTo(queries, k, exclusion), kernels.backend).toEqual(expected);
            expect(index.withinOf(queries, 1.5, exclusion), kernels.backend).toEqual(inRadius);
            index.close();
          }
        },
      ),
      { numRuns: 200 },
    );
  });
});

const wave: Case = {
  kind: 'quantisedWave',
  seed: 3,
  length: 3000,
  channels: 1,
  dimension: 3,
  delay: 4,
  stride: 1,
};

describe('edges', () => {
  test('every point of a long record full of ties, in the order asked for', () => {
    const vectors = build(wave);
    const queries = createRandom(5).permutation(vectors.starts.length);
    const results = backends.map((kernels) => {
      const index = kernels.neighbourIndex(vectors, 'euclidean');
      const found = index.nearest(queries, 7, 10);
      index.close();
      return found;
    });
    expect(results[1]).toEqual(results[0]);
    expect(results[2]).toEqual(results[0]);
    const some = queries.subarray(0, 50);
    const expected = bruteNearest(vectors, asQueries(vectors, some), 7, 10, 'euclidean');
    expect(results[0]!.indices.slice(0, 350)).toEqual(expected.indices);
    expect(results[0]!.distances.slice(0, 350)).toEqual(expected.distances);
  });

  test('rows that do not fit the room of one kernel call are joined', () => {
    const vectors = build({ ...wave, kind: 'constant' });
    const count = vectors.starts.length;
    const queries = Int32Array.from({ length: 70 }, (_, i) => i * 40);
    for (const kernels of backends) {
      const index = kernels.neighbourIndex(vectors, 'maximum');
      const found = index.within(queries, 0, -1);
      index.close();
      expect(found.indices.length).toBe(70 * count);
      expect([...found.rowStarts]).toEqual(Array.from({ length: 71 }, (_, i) => i * count));
      const row = Int32Array.from({ length: count }, (_, i) => i);
      for (let q = 0; q < 70; q++) expect(found.indices.subarray(q * count, (q + 1) * count)).toEqual(row);
      expect(found.distances.every((d) => d === 0)).toBe(true);
    }
  });

  test.each([0, 1, 31, 32, 33, 64, 65])('an index of %i points', (count) => {
    const data = Float64Array.from({ length: 100 }, (_, i) => Math.sin(i * i));
    const starts = Int32Array.from({ length: count }, (_, i) => i);
    const vectors = { data, starts, offsets: Int32Array.of(0, 30) };
    const queries = { coordinates: Float64Array.of(0.1, -0.2, 5, 5), times: Int32Array.of(3, -(2 ** 31)) };
    for (const kernels of backends) {
      const index = kernels.neighbourIndex(vectors, 'euclidean');
      expect(index.nearestTo(queries, 3, 5)).toEqual(bruteNearest(vectors, queries, 3, 5, 'euclidean'));
      expect(index.withinOf(queries, 1, 5)).toEqual(bruteWithin(vectors, queries, 1, 5, 'euclidean'));
      expect(index.nearest(new Int32Array(0), 3, 5).indices).toEqual(new Int32Array(0));
      expect(index.within(new Int32Array(0), 1, 5).rowStarts).toEqual(Int32Array.of(0));
      index.close();
    }
  });

  test('the exclusion window does not wrap at the ends of 32-bit times', () => {
    const data = Float64Array.of(0, 1, 2, 3);
    const vectors = { data, starts: Int32Array.of(0, 1, 2, 3), offsets: Int32Array.of(0) };
    const times = Int32Array.of(-(2 ** 31), 2 ** 31 - 1, 0);
    const queries = { coordinates: Float64Array.of(0, 0, 0), times };
    for (const kernels of backends) {
      const index = kernels.neighbourIndex(vectors, 'maximum');
      for (const exclusion of [-1, 0, 1, 2 ** 31 - 1])
        expect(index.nearestTo(queries, 4, exclusion)).toEqual(
          bruteNearest(vectors, queries, 4, exclusion, 'maximum'),
        );
      index.close();
    }
  });

  test('the caller may change its arrays afterwards: the index holds copies', () => {
    const vectors = build({ ...wave, length: 200 });
    for (const kernels of backends) {
      const own = {
        data: vectors.data.slice(),
        starts: vectors.starts.slice(),
        offsets: vectors.offsets.slice(),
      };
      const index = kernels.neighbourIndex(own, 'euclidean');
      own.data.fill(0);
      own.starts.fill(0);
      own.offsets.fill(0);
      const queries = Int32Array.of(0, 50, 120);
      const expected = bruteNearest(vectors, asQueries(vectors, queries), 4, 2, 'euclidean');
      const found = index.nearest(queries, 4, 2);
      expect(found).toEqual(expected);
      index.close();
      expect(found).toEqual(expected);
    }
  });
});

test('memory of an index is given back on close, scratch of a call at once', () => {
  const vectors = build({ ...wave, kind: 'random' });
  for (const kernels of backends) {
    const before = kernels.memory().used;
    const first = kernels.neighbourIndex(vectors, 'euclidean');
    const one = kernels.memory().used;
    const second = kernels.neighbourIndex(vectors, 'maximum');
    const both = kernels.memory().used;
    second.nearest(Int32Array.of(1, 2, 3), 5, 10);
    second.within(Int32Array.of(1, 2, 3), 1, 10);
    expect(kernels.memory().used).toBe(both);
    if (kernels.backend !== 'js') expect(one).toBeGreaterThan(before);
    first.close();
    first.close();
    expect(kernels.memory().used).toBe(before + (both - one));
    expect(second.nearest(Int32Array.of(7), 1, 0).indices).toEqual(
      bruteNearest(vectors, asQueries(vectors, Int32Array.of(7)), 1, 0, 'maximum').indices,
    );
    second.close();
    expect(kernels.memory().used).toBe(before);
  }
});

test('exact: two points of a unit square grid of side 5 are √2 apart on the diagonal, 1 in the maximum norm', () => {
  const data = Float64Array.from({ length: 50 }, (_, i) => (i < 25 ? i % 5 : Math.floor((i - 25) / 5)));
  const vectors = {
    data,
    starts: Int32Array.from({ length: 25 }, (_, i) => i),
    offsets: Int32Array.of(0, 25),
  };
  for (const kernels of backends) {
    const euclidean = kernels.neighbourIndex(vectors, 'euclidean');
    const centre = euclidean.nearest(Int32Array.of(12), 9, -1);
    expect([...centre.indices]).toEqual([12, 7, 11, 13, 17, 6, 8, 16, 18]);
    expect([...centre.distances]).toEqual([0, 1, 1, 1, 1, ...Array(4).fill(Math.SQRT2)]);
    euclidean.close();
    const maximum = kernels.neighbourIndex(vectors, 'maximum');
    expect([...maximum.within(Int32Array.of(12), 1, 0).indices]).toEqual([6, 7, 8, 11, 13, 16, 17, 18]);
    maximum.close();
  }
});

test('exact: √3 as a double squares to less than 3, and as a radius still finds the point it was read from', () => {
  expect(Math.sqrt(3) * Math.sqrt(3)).toBeLessThan(3);
  const vectors = {
    data: Float64Array.of(0, 1, 0, 1, 0, 1),
    starts: Int32Array.of(0, 1),
    offsets: Int32Array.of(0, 2, 4),
  };
  for (const kernels of backends) {
    const index = kernels.neighbourIndex(vectors, 'euclidean');
    const { distances } = index.nearest(Int32Array.of(0), 1, 0);
    expect([...index.within(Int32Array.of(0), distances[0]!, 0).indices]).toEqual([1]);
    index.close();
  }
});
