import fc from 'fast-check';
import { Matrix, QrDecomposition, solve } from 'ml-matrix';
import { beforeAll, describe, expect, it } from 'vitest';
import type { DelayVectors, Kernels, LocalFitInput, NearestNeighbours } from '../../src/base/kernels.ts';
import { createRandom } from '../../src/base/random.ts';
import { openKernels } from '../../src/core/open.ts';

let backends: Kernels[];
beforeAll(async () => {
  backends = await Promise.all(
    (['js', 'wasm-scalar', 'wasm-simd'] as const).map((backend) => openKernels({ backend })),
  );
});

function same<T>(run: (kernels: Kernels) => T): T {
  const [first, ...others] = backends.map(run);
  for (const other of others) expect(other).toEqual(first);
  return first!;
}

interface Setting {
  readonly m: number;
  readonly targets: number;
  readonly k: number;
  readonly count: number;
  readonly seed: number;
  readonly kind: 'random' | 'duplicated' | 'collinear';
  readonly found: number;
}

const setting = fc.record<Setting>({
  m: fc.integer({ min: 1, max: 7 }),
  targets: fc.integer({ min: 1, max: 9 }),
  k: fc.integer({ min: 1, max: 30 }),
  count: fc.integer({ min: 1, max: 5 }),
  seed: fc.integer({ min: 0, max: 1e6 }),
  kind: fc.constantFrom('random', 'duplicated', 'collinear'),
  found: fc.integer({ min: 0, max: 30 }),
});

function make({ m, targets, k, count, seed, kind, found }: Setting): LocalFitInput {
  const random = createRandom(seed);
  const length = 200;
  const data = Float64Array.from({ length }, (_, i) =>
    kind === 'collinear' ? i * 0.01 : kind === 'duplicated' ? random.integer(2) : random.normal(),
  );
  const offsets = Int32Array.from({ length: m }, (_, d) => -d);
  const vectors: DelayVectors = { data, offsets, starts: Int32Array.from({ length: 150 }, (_, i) => i + 10) };
  const queries = Float64Array.from({ length: count * m }, () =>
    kind === 'collinear' ? 0.7 : random.normal(),
  );
  const indices = new Int32Array(count * k).fill(-1);
  const distances = new Float64Array(count * k).fill(Number.POSITIVE_INFINITY);
  for (let q = 0; q < count; q++) {
    const size = Math.min(k, found);
    const sorted = Float64Array.from({ length: size }, () =>
      kind === 'duplicated' ? 0 : random.uniform(),
    ).sort();
    for (let i = 0; i < size; i++) {
      indices[q * k + i] = random.integer(150);
      distances[q * k + i] = sorted[i]!;
    }
  }
  const neighbours: NearestNeighbours = { k, indices, distances };
  const targetOffsets = Int32Array.from({ length: targets }, (_, h) => h + 1);
  return {
    vectors,
    targetOffsets,
    queries,
    neighbours,
    order: 1,
    weights: 'tricube',
    ridge: 1e-3,
    coefficients: true,
  };
}

describe('local fits', () => {
  it('have the same bits on every backend, whatever the points, weights, order and number found', () => {
    fc.assert(
      fc.property(
        setting,
        fc.constantFrom('uniform', 'tricube'),
        fc.constantFrom(0, 1),
        fc.constantFrom(0, 1e-6, 1),
        (s, weights, order, ridge) => {
          same((kernels) => kernels.localFits({ ...make(s), weights, order, ridge } as LocalFitInput));
        },
      ),
      { numRuns: 200 },
    );
  });

  it('solve the weighted ridge equations (ml-matrix, general-purpose reference)', () => {
    fc.assert(
      fc.property(setting, (s) => {
        fc.pre(s.kind === 'random' && Math.min(s.k, s.found) >= s.m + 2);
        const input = make(s);
        const { predictions, coefficients } = same((kernels) => kernels.localFits(input));
        const { data, starts, offsets } = input.vectors;
        for (let q = 0; q < s.count; q++) {
          const rows: number[][] = [];
          const values: number[][] = [];
          const weight: number[] = [];
          const size = Math.min(s.k, s.found);
          const farthest = input.neighbours.distances[q * s.k + size - 1]!;
          for (let i = 0; i < size; i++) {
            const start = starts[input.neighbours.indices[q * s.k + i]!]!;
            rows.push(Array.from(offsets, (o, d) => data[start + o]! - input.queries[q * s.m + d]!));
            values.push(Array.from(input.targetOffsets, (o) => data[start + o]!));
            const u = input.neighbours.distances[q * s.k + i]! / (1.0001 * farthest);
            weight.push((1 - u ** 3) ** 3);
          }
          // Intercept free, slopes penalised by ridge · trace / m of the centred moments.
          const total = weight.reduce((a, b) => a + b, 0);
          const mean = Array.from(
            offsets,
            (_, d) => rows.reduce((sum, r, i) => sum + weight[i]! * r[d]!, 0) / total,
          );
          const trace = rows.reduce(
            (sum, r, i) => sum + weight[i]! * r.reduce((a, x, d) => a + (x - mean[d]!) ** 2, 0),
            0,
          );
          // As least squares by QR, a row √ridge to each slope: the normal equations of uncentred points
          // lose all digits beside a neighbour of weight 3e-11.
          const penalty = Math.sqrt((1e-3 * trace) / s.m);
          const design = new Matrix([
            ...rows.map((r, i) => [1, ...r].map((x) => x * Math.sqrt(weight[i]!))),
            ...rows[0]!.map((_, d) => [0, ...rows[0]!.map((_, e) => (d === e ? penalty : 0))]),
          ]);
          const target = new Matrix([
            ...values.map((r, i) => r.map((x) => x * Math.sqrt(weight[i]!))),
            ...rows[0]!.map(() => values[0]!.map(() => 0)),
          ]);
          const solution = solve(design, target);
          for (let h = 0; h < s.targets; h++) {
            // Both solve well-posed equations (ridge 1e-3): conditioning below 1e4 times rounding.
            expect(predictions[q * s.targets + h]!).toBeCloseTo(solution.get(0, h), 7);
            for (let d = 0; d < s.m; d++)
              expect(coefficients![(q * s.targets + h) * s.m + d]!).toBeCloseTo(solution.get(d + 1, h), 7);
          }
        }
      }),
      { numRuns: 60 },
    );
  });

  it('give back a linear rule exactly, to rounding', () => {
    const random = createRandom(1);
    const x = Float64Array.from({ length: 400 }, () => random.normal());
    const data = new Float64Array(800);
    data.set(x);
    for (let i = 1; i < 400; i++) data[400 + i] = 2 * x[i]! - 3 * x[i - 1]! + 5;
    const vectors = {
      data,
      offsets: Int32Array.of(0, -1),
      starts: Int32Array.from({ length: 300 }, (_, i) => i + 1),
    };
    const indices = Int32Array.from({ length: 20 }, (_, i) => i * 7);
    const input: LocalFitInput = {
      vectors,
      targetOffsets: Int32Array.of(400),
      queries: Float64Array.of(0.5, -0.25),
      neighbours: { k: 20, indices, distances: new Float64Array(20).fill(1) },
      order: 1,
      weights: 'uniform',
      ridge: 0,
      coefficients: true,
    };
    const { predictions, coefficients } = same((kernels) => kernels.localFits(input));
    expect(predictions[0]).toBeCloseTo(2 * 0.5 + 3 * 0.25 + 5, 10);
    expect(Array.from(coefficients!)).toEqual([expect.closeTo(2, 10), expect.closeTo(-3, 10)]);
  });

  it('give NaN without a neighbour and the mean with too few for a plane', () => {
    const input = make({ m: 3, targets: 2, k: 4, count: 1, seed: 1, kind: 'random', found: 0 });
    expect(Array.from(same((kernels) => kernels.localFits(input)).predictions)).toEqual([
      Number.NaN,
      Number.NaN,
    ]);
    const few = {
      ...make({ m: 3, targets: 1, k: 4, count: 1, seed: 1, kind: 'random', found: 2 }),
      weights: 'uniform' as const,
    };
    const { data, starts } = few.vectors;
    const [a, b] = few.neighbours.indices;
    const mean = (data[starts[a!]! + 1]! + data[starts[b!]! + 1]!) / 2;
    expect(same((kernels) => kernels.localFits(few)).predictions[0]).toBeCloseTo(mean, 12);
  });
});

describe('orthonormalise', () => {
  it('gives orthonormal columns that span the same, with the volume kept, and the same bits', () => {
    fc.assert(
      fc.property(
        fc.integer({ min: 1, max: 12 }),
        fc.integer({ min: 0, max: 1e6 }),
        fc.integer({ min: 0, max: 11 }),
        (rows, seed, less) => {
          const columns = Math.max(1, rows - less);
          const random = createRandom(seed);
          const matrix = Float64Array.from({ length: rows * columns }, () => random.normal());
          const { matrix: q, logNorms } = same((kernels) => kernels.orthonormalise(matrix, rows, columns));
          const Q = Matrix.from1DArray(rows, columns, Array.from(q));
          const A = Matrix.from1DArray(rows, columns, Array.from(matrix));
          const gram = Q.transpose().mmul(Q);
          for (let i = 0; i < columns; i++)
            for (let j = 0; j < columns; j++) expect(gram.get(i, j)).toBeCloseTo(i === j ? 1 : 0, 7);
          // The volume the columns span, by Householder reflections (ml-matrix, general-purpose reference). The
          // determinant of the Gram matrix would square the condition number.
          const volume = new QrDecomposition(A).upperTriangularMatrix.diagonal();
          const expected = volume.reduce((sum, r) => sum + Math.log(Math.abs(r)), 0);
          expect(logNorms.reduce((a, b) => a + b, 0)).toBeCloseTo(expected, 8);
        },
      ),
      { numRuns: 60 },
    );
  });

  it('turns a zero column into zeros with −Infinity', () => {
    const { matrix, logNorms } = same((kernels) => kernels.orthonormalise(Float64Array.of(1, 0, 1, 0), 2, 2));
    expect(Array.from(logNorms)).toEqual([
      expect.closeTo(Math.log(Math.SQRT2), 12),
      Number.NEGATIVE_INFINITY,
    ]);
    expect([matrix[1], matrix[3]]).toEqual([0, 0]);
  });
});
