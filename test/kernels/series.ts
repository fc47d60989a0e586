import type { Kernels } from '../../src/base/kernels.ts';
import { createRandom } from '../../src/base/random.ts';
import { openKernels } from '../../src/core/open.ts';

/** The three builds, for differential tests. */
export function allBackends(): Promise<readonly Kernels[]> {
  return Promise.all(
    (['wasm-simd', 'wasm-scalar', 'js'] as const).map((backend) => openKernels({ backend })),
  );
}

/** Series of each kind that breaks sums over pairs: ties, thin sets, values on the edges of bins, extremes. */
export const SERIES = {
  random: (seed: number, length: number) => {
    const random = createRandom(seed);
    return Float64Array.from({ length }, () => random.normal());
  },
  clustered: (seed: number, length: number) => {
    const random = createRandom(seed);
    return Float64Array.from({ length }, () => random.integer(3) * 10 + 1e-3 * random.normal());
  },
  duplicated: (seed: number, length: number) => {
    const random = createRandom(seed);
    return Float64Array.from({ length }, () => random.integer(4));
  },
  constant: (_seed: number, length: number) => new Float64Array(length).fill(2.5),
  collinear: (seed: number, length: number) => Float64Array.from({ length }, (_, t) => (seed + t) * 0.125),
  /** Differences are multiples of 1/16: many fall exactly on an edge, which they are not below. */
  onEdges: (seed: number, length: number) => {
    const random = createRandom(seed);
    return Float64Array.from({ length }, () => random.integer(48) / 16);
  },
  wave: (seed: number, length: number) =>
    Float64Array.from({ length }, (_, t) => Math.sin(0.07 * (t + seed)) + Math.sin(0.31 * t)),
  wide: (seed: number, length: number) => {
    const random = createRandom(seed);
    return Float64Array.from({ length }, () => random.normal() * 10 ** (random.integer(140) - 70));
  },
  subnormal: (seed: number, length: number) => {
    const random = createRandom(seed);
    return Float64Array.from({ length }, () => random.integer(5) * 5e-324);
  },
  largest: (seed: number, length: number) => {
    const random = createRandom(seed);
    return Float64Array.from({ length }, () => (random.uniform() < 0.5 ? -1 : 1) * 1e308 * random.uniform());
  },
} as const;

export type SeriesKind = keyof typeof SERIES;
export const seriesKinds = Object.keys(SERIES) as SeriesKind[];

/** Bits of a double array, so that −0, NaN and the last bit count. */
export function bits(values: Float64Array): string {
  return Buffer.from(values.buffer, values.byteOffset, values.byteLength).toString('hex');
}
