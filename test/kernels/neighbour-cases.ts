import fc from 'fast-check';
import type {
  DelayVectors,
  Kernels,
  Metric,
  NearestNeighbours,
  QueryPoints,
  RadiusNeighbours,
} from '../../src/base/kernels.ts';
import { createRandom } from '../../src/base/random.ts';
import { openKernels } from '../../src/core/open.ts';

/** The three builds, for differential tests. */
export async function allBackends(): Promise<readonly Kernels[]> {
  return Promise.all(
    (['wasm-simd', 'wasm-scalar', 'js'] as const).map((backend) => openKernels({ backend })),
  );
}

/** One value of a series of each kind; what breaks searches is ties, thin sets and empty directions. */
const KINDS = {
  random: (seed: number) => {
    const random = createRandom(seed);
    return () => random.normal();
  },
  clustered: (seed: number) => {
    const random = createRandom(seed);
    return () => random.integer(3) * 100 + 1e-6 * random.normal();
  },
  duplicated: (seed: number) => {
    const random = createRandom(seed);
    return () => random.integer(4);
  },
  constant: () => () => 2.5,
  collinear: (seed: number) => {
    let t = seed % 7;
    return () => t++ * 0.125;
  },
  quantisedWave: (seed: number) => {
    let t = seed % 100;
    return () => Math.round(20 * Math.sin(0.05 * t++)) / 20;
  },
  smallest: (seed: number) => {
    const random = createRandom(seed);
    return () => random.integer(3) * 5e-324 - (random.integer(2) === 0 ? 0 : 1e-200);
  },
  largest: (seed: number) => {
    const random = createRandom(seed);
    return () => (random.uniform() - 0.5) * 10 ** random.integer(309);
  },
} as const;

export type Kind = keyof typeof KINDS;

export interface Case {
  readonly kind: Kind;
  readonly seed: number;
  /** Samples per channel. */
  readonly length: number;
  readonly channels: number;
  readonly dimension: number;
  readonly delay: number;
  /** Every n-th start only, and none in a gap. */
  readonly stride: number;
}

export const cases: fc.Arbitrary<Case> = fc.record({
  kind: fc.constantFrom(...(Object.keys(KINDS) as Kind[])),
  seed: fc.nat(1000),
  length: fc.oneof(fc.integer({ min: 30, max: 80 }), fc.integer({ min: 80, max: 600 })),
  channels: fc.integer({ min: 1, max: 3 }),
  dimension: fc.integer({ min: 1, max: 7 }),
  delay: fc.integer({ min: 1, max: 4 }),
  stride: fc.integer({ min: 1, max: 3 }),
});

/** Delay vectors that look back, over channels in turn, with a gap of missing samples in the middle third. */
export function build({ kind, seed, length, channels, dimension, delay, stride }: Case): DelayVectors {
  const next = KINDS[kind](seed);
  const data = Float64Array.from({ length: length * channels }, next);
  const gap = Math.floor(length / 3);
  for (let c = 0; c < channels; c++) data[c * length + gap] = Number.NaN;
  const offsets = Int32Array.from(
    { length: dimension },
    (_, d) => (d % channels) * length - Math.floor(d / channels) * delay,
  );
  const starts: number[] = [];
  for (let t = (dimension - 1) * delay; t < length; t += stride)
    if (offsets.every((o) => Number.isFinite(data[t + o]!))) starts.push(t);
  return { data, starts: Int32Array.from(starts), offsets };
}

export function coordinatesOf({ data, starts, offsets }: DelayVectors): number[][] {
  return Array.from(starts, (s) => Array.from(offsets, (o) => data[s + o]!));
}

/** Distance as the contract defines it: coordinates in order, compared as squares under the Euclidean norm. */
function measure(a: readonly number[], b: readonly number[], metric: Metric): number {
  let sum = 0;
  for (let d = 0; d < a.length; d++) {
    const x = Math.abs(a[d]! - b[d]!);
    sum = metric === 'euclidean' ? sum + x * x : Math.max(sum, x);
  }
  return sum;
}

/** All admissible points of one query, nearest first, ties by ordinal. */
function ranked(
  points: number[][],
  starts: Int32Array,
  query: readonly number[],
  time: number | undefined,
  exclusion: number,
  metric: Metric,
) {
  return points
    .map((point, index) => ({ index, measure: measure(point, query, metric) }))
    .filter((x) => Number.isFinite(x.measure))
    .filter((x) => time === undefined || Math.abs(starts[x.index]! - time) > exclusion)
    .sort((a, b) => a.measure - b.measure || a.index - b.index)
    .map((x) => ({ index: x.index, distance: metric === 'euclidean' ? Math.sqrt(x.measure) : x.measure }));
}

export function bruteNearest(
  vectors: DelayVectors,
  queries: QueryPoints,
  k: number,
  exclusion: number,
  metric: Metric,
): NearestNeighbours {
  const points = coordinatesOf(vectors);
  const m = vectors.offsets.length;
  const count = queries.coordinates.length / m;
  const indices = new Int32Array(count * k).fill(-1);
  const distances = new Float64Array(count * k).fill(Number.POSITIVE_INFINITY);
  for (let q = 0; q < count; q++) {
    const query = [...queries.coordinates.subarray(q * m, q * m + m)];
    ranked(points, vectors.starts, query, queries.times?.[q], exclusion, metric)
      .slice(0, k)
      .forEach((found, i) => {
        indices[q * k + i] = found.index;
        distances[q * k + i] = found.distance;
      });
  }
  return { k, indices, distances };
}

export function bruteWithin(
  vectors: DelayVectors,
  queries: QueryPoints,
  radius: number,
  exclusion: number,
  metric: Metric,
): RadiusNeighbours {
  const points = coordinatesOf(vectors);
  const m = vectors.offsets.length;
  const rowStarts = [0];
  const rows: { index: number; distance: number }[] = [];
  for (let q = 0; q < queries.coordinates.length / m; q++) {
    const query = [...queries.coordinates.subarray(q * m, q * m + m)];
    rows.push(
      ...ranked(points, vectors.starts, query, queries.times?.[q], exclusion, metric)
        .filter((x) => x.distance <= radius)
        .sort((a, b) => a.index - b.index),
    );
    rowStarts.push(rows.length);
  }
  return {
    rowStarts: Int32Array.from(rowStarts),
    indices: Int32Array.from(rows, (r) => r.index),
    distances: Float64Array.from(rows, (r) => r.distance),
  };
}

/** Indexed points as coordinates and times. */
export function asQueries(vectors: DelayVectors, ordinals: Int32Array): QueryPoints {
  const points = coordinatesOf(vectors);
  return {
    coordinates: Float64Array.from([...ordinals].flatMap((i) => points[i]!)),
    times: ordinals.map((i) => vectors.starts[i]!),
  };
}
