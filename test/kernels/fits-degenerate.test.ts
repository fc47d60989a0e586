import fc from 'fast-check';
import { Matrix, solve } from 'ml-matrix';
import { afterAll, beforeAll, describe, expect, test } from 'vitest';
import type { Kernels, LocalFitInput } from '../../src/base/kernels.ts';
import { createRandom } from '../../src/base/random.ts';
import { allBackends, bits, SERIES, type SeriesKind, seriesKinds } from './series.ts';

let backends: readonly Kernels[] = [];
beforeAll(async () => {
  backends = await allBackends();
});
afterAll(() => {
  for (const kernels of backends) kernels.close();
});

/** Every NaN alike: its sign and payload are the processor's. */
const plain = (values: Float64Array) => bits(values.map((x) => (Number.isNaN(x) ? Number.NaN : x)));

/** The result all backends agree on to the last bit (−0 is not 0). */
function agreed<T extends object>(run: (kernels: Kernels) => T): T {
  const results = backends.map(run);
  for (const result of results)
    for (const [field, values] of Object.entries(result) as [keyof T, Float64Array][])
      expect(plain(values)).toBe(plain(results[0]![field] as Float64Array));
  return results[0]!;
}

interface Case {
  readonly kind: SeriesKind;
  readonly seed: number;
  readonly length: number;
  readonly m: number;
  readonly targets: number;
  readonly queries: number;
  readonly k: number;
  readonly gap: number;
}

const casesOf = (kinds: readonly SeriesKind[]): fc.Arbitrary<Case> =>
  fc.record({
    kind: fc.constantFrom(...kinds),
    seed: fc.nat(1000),
    length: fc.integer({ min: 30, max: 200 }),
    m: fc.integer({ min: 1, max: 6 }),
    targets: fc.integer({ min: 1, max: 7 }),
    queries: fc.integer({ min: 0, max: 4 }),
    k: fc.integer({ min: 1, max: 40 }),
    gap: fc.integer({ min: 0, max: 6 }),
  });

/** Two channels end to end with a gap in each; queries from the record, their neighbours as the search gives them. */
function build({ kind, seed, length, m, targets, queries, k, gap }: Case): LocalFitInput {
  const data = new Float64Array(2 * length);
  data.set(SERIES[kind](seed, length));
  data.set(SERIES[kind](seed + 1, length), length);
  data.fill(Number.NaN, length >> 1, (length >> 1) + gap);
  data.fill(Number.NaN, length + (length >> 2), length + (length >> 2) + gap);
  // Coordinates and targets alternate between the channels.
  const offsets = Int32Array.from({ length: m }, (_, d) => -(d >> 1) + (d & 1) * length);
  const targetOffsets = Int32Array.from({ length: targets }, (_, h) => 1 + (h >> 1) + (h & 1) * length);
  const used = [...offsets, ...targetOffsets];
  const inside = Int32Array.from({ length: length - 8 }, (_, t) => t + 3);
  const starts = inside.filter((t) => used.every((o) => Number.isFinite(data[t + o]!)));
  const vectors = { data, starts, offsets };
  const random = createRandom(seed, 5);
  const points = new Float64Array(queries * m);
  for (let q = 0; q < queries; q++) {
    const start = starts[random.integer(starts.length)]!;
    for (let d = 0; d < m; d++) points[q * m + d] = data[start + offsets[d]!]!;
  }
  const index = backends[0]!.neighbourIndex(vectors, 'euclidean');
  const neighbours = index.nearestTo({ coordinates: points }, k, -1);
  index.close();
  return {
    vectors,
    targetOffsets,
    queries: points,
    neighbours,
    order: 1,
    weights: 'tricube',
    ridge: 1e-3,
    coefficients: true,
  };
}

/**
 * Cleveland 1979. 1 − u³ cancels at the farthest neighbour (u = 1 / 1.0001): a last bit of u is 10⁴ last bits of
 * the weight. Evaluated as the kernels do, so that what is compared below is the fit and not that cancellation.
 */
function tricubeOf(u: number): number {
  const v = 1 - u * u * u;
  return v * v * v;
}

/** Neighbours of query q: weight, coordinates relative to the query, targets. */
function sample({ vectors, targetOffsets, queries, neighbours, weights }: LocalFitInput, q: number) {
  const { data, starts, offsets } = vectors;
  const { k, indices, distances } = neighbours;
  const rows = Array.from(indices.subarray(q * k, (q + 1) * k)).filter((j) => j >= 0);
  const farthest = distances[q * k + rows.length - 1]!;
  const tricube = weights === 'tricube' && farthest > 0;
  return rows.map((j, i) => ({
    w: tricube ? tricubeOf(distances[q * k + i]! / (farthest * 1.0001)) : 1,
    x: Array.from(offsets, (o, d) => data[starts[j]! + o]! - queries[q * offsets.length + d]!),
    y: Array.from(targetOffsets, (o) => data[starts[j]! + o]!),
  }));
}

const sum = (values: readonly number[]) => values.reduce((a, b) => a + b, 0);

describe('local fits of records with gaps and two channels', () => {
  test('have the same bits on every backend, whatever the points', () => {
    fc.assert(
      fc.property(
        casesOf(seriesKinds),
        fc.constantFrom('uniform', 'tricube'),
        fc.constantFrom(0, 1),
        fc.constantFrom(0, 1e-6, 1),
        fc.boolean(),
        (c, weights, order, ridge, coefficients) => {
          const input = { ...build(c), weights, order, ridge, coefficients } as LocalFitInput;
          agreed((kernels) => kernels.localFits(input));
        },
      ),
      { numRuns: 250 },
    );
  });

  test('order 0 is the weighted mean, to rounding', () => {
    fc.assert(
      fc.property(
        casesOf(seriesKinds.filter((kind) => kind !== 'largest')),
        fc.constantFrom('uniform', 'tricube'),
        (c, weights) => {
          const input: LocalFitInput = { ...build(c), order: 0, weights };
          const { predictions, coefficients } = agreed((kernels) => kernels.localFits(input));
          for (let q = 0; q < c.queries; q++) {
            const points = sample(input, q);
            const total = sum(points.map(({ w }) => w));
            for (let h = 0; h < c.targets; h++) {
              const mean = sum(points.map(({ w, y }) => w * y[h]!)) / total;
              const size = sum(points.map(({ w, y }) => w * Math.abs(y[h]!))) / total;
              // A product, a sum and a division round for each of n terms, on both sides; 5e-324 beside subnormals.
              expect(Math.abs(predictions[q * c.targets + h]! - mean)).toBeLessThanOrEqual(
                2 ** -51 * (points.length + 4) * size + points.length * 5e-324,
              );
            }
          }
          expect(coefficients!.every((x) => x === 0)).toBe(true);
        },
      ),
      { numRuns: 100 },
    );
  });

  // (Σ w x xᵀ + ridge · trace / m · I) slopes = Σ w x y about the weighted means, in ml-matrix. Scales of one
  // size only: rounding of moments is relative to the largest, so `wide` has no entry-wise bound.
  test('solve the ridge equations where points coincide or lie on a line', () => {
    let solved = 0;
    fc.assert(
      fc.property(casesOf(['clustered', 'duplicated', 'constant', 'collinear', 'onEdges', 'wave']), (c) => {
        const input = build(c);
        const { predictions, coefficients } = agreed((kernels) => kernels.localFits(input));
        for (let q = 0; q < c.queries; q++) {
          const points = sample(input, q);
          if (points.length < c.m + 2) continue;
          const total = sum(points.map(({ w }) => w));
          const meanX = Array.from({ length: c.m }, (_, d) => sum(points.map((p) => p.w * p.x[d]!)) / total);
          const meanY = Array.from(
            { length: c.targets },
            (_, h) => sum(points.map((p) => p.w * p.y[h]!)) / total,
          );
          const X = new Matrix(points.map((p) => p.x.map((x, d) => x - meanX[d]!)));
          const Y = new Matrix(points.map((p) => p.y.map((y, h) => y - meanY[h]!)));
          const WX = new Matrix(points.map((p) => p.x.map((x, d) => p.w * (x - meanX[d]!))));
          const moments = X.transpose().mmul(WX);
          const ridge = (1e-3 * moments.trace()) / c.m;
          // Slopes of points that all coincide are zero by definition.
          const slopes =
            ridge > 0
              ? solve(moments.add(Matrix.eye(c.m).mul(ridge)), WX.transpose().mmul(Y))
              : Matrix.zeros(c.m, c.targets);
          if (ridge > 0) solved++;
          // Condition ≤ 1 + m / 1e-3 (every eigenvalue between ridge and ridge + trace): 7000 roundings of n terms.
          const size = 1 + Math.max(...Array.from(slopes.to1DArray(), Math.abs), ...meanY.map(Math.abs));
          const error =
            2 ** -52 * 7000 * (points.length + 10) * size * (1 + Math.max(...meanX.map(Math.abs)));
          for (let h = 0; h < c.targets; h++) {
            let value = meanY[h]!;
            for (let d = 0; d < c.m; d++) {
              value -= slopes.get(d, h) * meanX[d]!;
              const slope = coefficients![(q * c.targets + h) * c.m + d]!;
              expect(Math.abs(slope - slopes.get(d, h))).toBeLessThanOrEqual(error);
            }
            expect(Math.abs(predictions[q * c.targets + h]! - value)).toBeLessThanOrEqual(error);
          }
        }
      }),
      { numRuns: 150 },
    );
    expect(solved).toBeGreaterThan(50);
  });
});

describe('orthonormalise', () => {
  test('has the same bits on every backend, whatever the columns', () => {
    fc.assert(
      fc.property(
        fc.constantFrom(...seriesKinds),
        fc.nat(1000),
        fc.integer({ min: 1, max: 20 }),
        fc.integer({ min: 1, max: 20 }),
        (kind, seed, rows, columns) => {
          const matrix = SERIES[kind](seed, rows * columns);
          const before = matrix.slice();
          agreed((kernels) => kernels.orthonormalise(matrix, rows, columns));
          expect(matrix).toEqual(before);
        },
      ),
      { numRuns: 200 },
    );
  });

  test('exact: columns of powers of two along the axes keep their norms', () => {
    const size = 7;
    const matrix = new Float64Array(size * size);
    for (let i = 0; i < size; i++) matrix[i * size + i] = 2 ** (i - 3);
    const { matrix: q, logNorms } = agreed((kernels) => kernels.orthonormalise(matrix, size, size));
    for (let i = 0; i < size; i++) {
      expect(logNorms[i]).toBeCloseTo((i - 3) * Math.LN2, 14);
      for (let j = 0; j < size; j++) expect(q[i * size + j]).toBe(i === j ? 1 : 0);
    }
  });

  test('gives the factors of A = QR: R upper with the norms on its diagonal', () => {
    fc.assert(
      fc.property(fc.nat(1000), fc.integer({ min: 1, max: 9 }), (seed, columns) => {
        const rows = columns + 4;
        const matrix = SERIES.random(seed, rows * columns);
        const { matrix: q, logNorms } = agreed((kernels) => kernels.orthonormalise(matrix, rows, columns));
        const A = Matrix.from1DArray(rows, columns, Array.from(matrix));
        const R = Matrix.from1DArray(rows, columns, Array.from(q)).transpose().mmul(A);
        // Björck 1967 (BIT 7, 1): the loss of orthogonality is rounding times the condition number.
        for (let i = 0; i < columns; i++) {
          expect(R.get(i, i)).toBeCloseTo(Math.exp(logNorms[i]!), 10);
          for (let j = 0; j < i; j++) expect(R.get(i, j)).toBeCloseTo(0, 10);
        }
      }),
      { numRuns: 60 },
    );
  });
});
