import fc from 'fast-check';
import { afterAll, beforeAll, describe, expect, test } from 'vitest';
import {
  CORRELATION_EDGES,
  type CorrelationCounts,
  type CorrelationInput,
  type Kernels,
} from '../../src/base/kernels.ts';
import { createRandom } from '../../src/base/random.ts';
import { createCorrelation } from '../../src/core/correlation.ts';
import { loadBackend } from '../../src/core/open.ts';
import { instantiate } from '../../src/core/wasm.ts';
import { allBackends, SERIES, type SeriesKind, seriesKinds } from './series.ts';

let backends: readonly Kernels[] = [];
beforeAll(async () => {
  backends = await allBackends();
});
afterAll(() => {
  for (const kernels of backends) kernels.close();
});

const radius = (smallestExponent: number, b: number) =>
  2 ** (smallestExponent + Math.floor(b / 4)) * (1 + (b % 4) / 4);

/** The definition, word for word. */
function brute(input: CorrelationInput, pairsOf: Iterable<readonly [number, number]>): CorrelationCounts {
  const { series, valid, delay, dimensions, exclusion, smallestExponent } = input;
  const radii = Float64Array.from({ length: CORRELATION_EDGES }, (_, b) => radius(smallestExponent, b));
  const counts = new Float64Array(dimensions * CORRELATION_EDGES);
  let pairs = 0;
  for (const [s, t] of pairsOf) {
    if (!valid[s] || !valid[t] || Math.abs(s - t) <= exclusion) continue;
    pairs++;
    let distance = 0;
    for (let d = 0; d < dimensions; d++) {
      distance = Math.max(distance, Math.abs(series[s + d * delay]! - series[t + d * delay]!));
      for (let b = CORRELATION_EDGES - 1; b >= 0 && distance < radii[b]!; b--)
        counts[d * CORRELATION_EDGES + b]!++;
    }
  }
  return { radii, counts, pairs };
}

function* allPairs(starts: number): Generator<[number, number]> {
  for (let s = 0; s < starts; s++) for (let t = s + 1; t < starts; t++) yield [s, t];
}

function* pairsFrom(starts: number, references: Int32Array): Generator<[number, number]> {
  for (const r of references) for (let t = 0; t < starts; t++) yield [r, t];
}

interface Case {
  readonly kind: SeriesKind;
  readonly seed: number;
  readonly starts: number;
  readonly dimensions: number;
  readonly delay: number;
  readonly exclusion: number;
  readonly smallestExponent: number;
  readonly gap: number;
}

const cases: fc.Arbitrary<Case> = fc.record({
  kind: fc.constantFrom(...seriesKinds),
  seed: fc.nat(1000),
  starts: fc.oneof(fc.integer({ min: 0, max: 20 }), fc.integer({ min: 0, max: 150 })),
  dimensions: fc.oneof(fc.integer({ min: 1, max: 6 }), fc.integer({ min: 1, max: 32 })),
  delay: fc.integer({ min: 1, max: 20 }),
  exclusion: fc.oneof(fc.integer({ min: 0, max: 200 }), fc.constantFrom(0, 2 ** 31 - 1)),
  smallestExponent: fc.oneof(fc.integer({ min: -14, max: 2 }), fc.constantFrom(-1022, 1007)),
  gap: fc.integer({ min: 0, max: 12 }),
});

/** Every vector that touches a missing sample is marked incomplete; what stands there must not matter. */
function build({ kind, seed, starts, dimensions, delay, exclusion, smallestExponent, gap }: Case) {
  const length = starts + (dimensions - 1) * delay;
  const series = SERIES[kind](seed, length);
  const missing = Math.floor(length / 2);
  const valid = new Uint8Array(starts).fill(1);
  for (let i = missing; i < Math.min(length, missing + gap); i++) {
    series[i] = seed % 2 === 0 ? Number.NaN : 0;
    for (let d = 0; d < dimensions; d++) if (i - d * delay in valid) valid[i - d * delay] = 0;
  }
  return { series, valid, delay, dimensions, exclusion, smallestExponent } satisfies CorrelationInput;
}

function someReferences({ valid }: CorrelationInput, seed: number): Int32Array {
  const random = createRandom(seed, 2);
  return Int32Array.from(valid.keys()).filter((t) => valid[t] === 1 && random.uniform() < 0.3);
}

describe('counts equal brute force exactly on every backend', () => {
  test('all pairs', () => {
    fc.assert(
      fc.property(cases, (c) => {
        const input = build(c);
        const expected = brute(input, allPairs(c.starts));
        for (const kernels of backends) expect(kernels.correlationCounts(input)).toEqual(expected);
      }),
      { numRuns: 120 },
    );
  });

  test('reference points', () => {
    fc.assert(
      fc.property(cases, (c) => {
        const input = build(c);
        const references = someReferences(input, c.seed);
        const expected = brute(input, pairsFrom(c.starts, references));
        for (const kernels of backends)
          expect(kernels.correlationCountsFrom(input, references)).toEqual(expected);
      }),
      { numRuns: 120 },
    );
  });

  test.each(seriesKinds)('longer than the vector lanes and cache lines: %s', (kind) => {
    const input = build({
      kind,
      seed: 5,
      starts: 501,
      dimensions: 5,
      delay: 7,
      exclusion: 30,
      smallestExponent: -12,
      gap: 40,
    });
    const references = someReferences(input, 1);
    const all = brute(input, allPairs(501));
    const some = brute(input, pairsFrom(501, references));
    expect(all.pairs).toBeGreaterThan(80_000);
    for (const kernels of backends) {
      expect(kernels.correlationCounts(input)).toEqual(all);
      expect(kernels.correlationCountsFrom(input, references)).toEqual(some);
    }
  });

  test('the same however often the 32-bit tables are emptied', async () => {
    const input = build({
      kind: 'wave',
      seed: 3,
      starts: 400,
      dimensions: 4,
      delay: 5,
      exclusion: 3,
      smallestExponent: -12,
      gap: 5,
    });
    const references = someReferences(input, 1);
    for (const backend of ['wasm-simd', 'wasm-scalar'] as const) {
      const { module } = await loadBackend({ backend });
      const often = createCorrelation(instantiate(module!), 1000);
      expect(often.correlationCounts(input)).toEqual(brute(input, allPairs(400)));
      expect(often.correlationCountsFrom(input, references)).toEqual(
        brute(input, pairsFrom(400, references)),
      );
    }
  });
});

describe('laws', () => {
  test('every start as reference point counts each pair twice', () => {
    fc.assert(
      fc.property(cases, (c) => {
        const input = build(c);
        const references = Int32Array.from(input.valid.keys()).filter((t) => input.valid[t] === 1);
        for (const kernels of backends) {
          const once = kernels.correlationCounts(input);
          const twice = kernels.correlationCountsFrom(input, references);
          expect(twice.pairs).toBe(2 * once.pairs);
          expect(twice.counts).toEqual(once.counts.map((n) => 2 * n));
        }
      }),
      { numRuns: 40 },
    );
  });

  test('the same in units twice as large, and backwards in time', () => {
    const input = build({
      kind: 'random',
      seed: 8,
      starts: 300,
      dimensions: 6,
      delay: 3,
      exclusion: 10,
      smallestExponent: -13,
      gap: 0,
    });
    for (const kernels of backends) {
      const { counts, pairs } = kernels.correlationCounts(input);
      const larger = kernels.correlationCounts({
        ...input,
        series: input.series.map((x) => 2 * x),
        smallestExponent: -12,
      });
      expect(larger.counts).toEqual(counts);
      const backwards = kernels.correlationCounts({ ...input, series: input.series.slice().reverse() });
      // One dimension sees other samples at the ends; the full vectors are the same ones reversed.
      const last = 5 * CORRELATION_EDGES;
      expect(backwards.counts.slice(last)).toEqual(counts.slice(last));
      expect(backwards.pairs).toBe(pairs);
    }
  });

  test('input is left as it was', () => {
    const input = build({
      kind: 'random',
      seed: 4,
      starts: 50,
      dimensions: 3,
      delay: 2,
      exclusion: 4,
      smallestExponent: -10,
      gap: 3,
    });
    const before = structuredClone(input);
    for (const kernels of backends) {
      kernels.correlationCounts(input);
      kernels.correlationCountsFrom(input, Int32Array.of(0, 1));
      expect(input).toEqual(before);
    }
  });
});

/**
 * exact: uniform random numbers in 0 … 1 are closer than ε with probability C = 2ε − ε², vectors of m of them
 * with probability C^m (maximum norm; no sample shared between the two vectors of a pair).
 */
describe('uniform random points', () => {
  test('m = 1: C(ε) = 2ε − ε² within the exact standard error of the mean over pairs', () => {
    const n = 3000;
    const random = createRandom(11);
    const series = Float64Array.from({ length: n }, () => random.uniform());
    const input = {
      series,
      valid: new Uint8Array(n).fill(1),
      delay: 1,
      dimensions: 1,
      exclusion: 0,
      smallestExponent: -16,
    };
    for (const kernels of backends) {
      const { radii, counts, pairs } = kernels.correlationCounts(input);
      expect(pairs).toBe((n * (n - 1)) / 2);
      for (let b = 24; b < CORRELATION_EDGES && radii[b]! <= 0.5; b++) {
        const e = radii[b]!;
        const c = 2 * e - e * e;
        // Hoeffding 1948: 4 Var(P(|x − Y| < ε)) / n + 2 C(1 − C) / n², with E P² = 4ε² − 10ε³/3.
        const projection = 4 * e * e - (10 / 3) * e ** 3 - c * c;
        const error = Math.sqrt((4 * projection) / n + (2 * c * (1 - c)) / (n * (n - 1)));
        expect(Math.abs(counts[b]! / pairs - c)).toBeLessThan(4 * error);
      }
    }
  });

  test('m = 1 … 4: C(ε)^m within the standard error over 60 series', () => {
    const repeats = 60;
    const starts = 400;
    const dimensions = 4;
    const kernels = backends[0]!;
    // ε = 0.25, 0.375, 0.5, 0.625
    const edges = [56, 58, 60, 61];
    const seen = edges.map(() => Array.from({ length: dimensions }, () => [] as number[]));
    for (let k = 0; k < repeats; k++) {
      const random = createRandom(100 + k);
      const { counts, pairs } = kernels.correlationCounts({
        series: Float64Array.from({ length: starts + 3 * 2 }, () => random.uniform()),
        valid: new Uint8Array(starts).fill(1),
        delay: 2,
        dimensions,
        exclusion: 3 * 2,
        smallestExponent: -16,
      });
      edges.forEach((b, i) => {
        for (let d = 0; d < dimensions; d++) seen[i]![d]!.push(counts[d * CORRELATION_EDGES + b]! / pairs);
      });
    }
    edges.forEach((b, i) => {
      const e = radius(-16, b);
      for (let d = 0; d < dimensions; d++) {
        const values = seen[i]![d]!;
        const mean = values.reduce((a, x) => a + x) / repeats;
        const variance = values.reduce((a, x) => a + (x - mean) ** 2, 0) / (repeats - 1);
        expect(Math.abs(mean - (2 * e - e * e) ** (d + 1))).toBeLessThan(4 * Math.sqrt(variance / repeats));
      }
    });
  });
});
