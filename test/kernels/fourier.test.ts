import fc from 'fast-check';
import { beforeAll, describe, expect, it } from 'vitest';
import { cos, sin } from '../../src/base/elementary.ts';
import type { Kernels } from '../../src/base/kernels.ts';
import { createRandom } from '../../src/base/random.ts';
import { openKernels } from '../../src/core/open.ts';

let backends: Kernels[];
beforeAll(async () => {
  backends = await Promise.all(
    (['js', 'wasm-scalar', 'wasm-simd'] as const).map((backend) => openKernels({ backend })),
  );
});

/** Every length 2^a·3^b·5^c up to 1,000. */
const LENGTHS: number[] = [];
for (let n = 2; n <= 1000; n++) {
  let rest = n;
  for (const p of [2, 3, 5]) while (rest % p === 0) rest /= p;
  if (rest === 1) LENGTHS.push(n);
}

/** All backends' results, which must be the same bits; returns the first. */
function same<T>(run: (kernels: Kernels) => T): T {
  const [first, ...others] = backends.map(run);
  for (const other of others) expect(other).toEqual(first);
  return first!;
}

const noise = (n: number, seed: number) => {
  const random = createRandom(seed);
  return Float64Array.from({ length: n }, () => random.normal());
};

describe('Fourier transform', () => {
  it('equals the sum that defines it (exact), for every length that is taken', () => {
    for (const n of LENGTHS.filter((n) => n <= 240)) {
      const series = noise(n, n);
      const { real, imaginary } = same((k) => k.realSpectrum(series));
      for (let k = 0; k < real.length; k++) {
        let re = 0;
        let im = 0;
        for (let t = 0; t < n; t++) {
          const angle = (2 * Math.PI * ((k * t) % n)) / n;
          re += series[t]! * cos(angle);
          im -= series[t]! * sin(angle);
        }
        // Rounding of the direct sum: n additions of size about 1.
        expect(Math.abs(re - real[k]!), `n = ${n}, bin ${k}`).toBeLessThan(1e-13 * n);
        expect(Math.abs(im - imaginary[k]!), `n = ${n}, bin ${k}`).toBeLessThan(1e-13 * n);
      }
    }
  });

  it('is undone by the inverse, keeps the energy (Parseval, exact), and gives the same bits', () => {
    fc.assert(
      fc.property(fc.constantFrom(...LENGTHS), fc.integer({ min: 0, max: 1e6 }), (n, seed) => {
        const series = noise(n, seed);
        const spectrum = same((k) => k.realSpectrum(series));
        const back = same((k) => k.realSeries(spectrum, n));
        let energy = 0;
        let spectral = 0;
        for (let t = 0; t < n; t++) {
          expect(Math.abs(back[t]! - series[t]!)).toBeLessThan(1e-12);
          energy += series[t]! ** 2;
        }
        for (let k = 0; k < spectrum.real.length; k++) {
          const twice = k === 0 || 2 * k === n ? 1 : 2;
          spectral += twice * (spectrum.real[k]! ** 2 + spectrum.imaginary[k]! ** 2);
        }
        expect(Math.abs(spectral / n - energy)).toBeLessThan(1e-11 * energy);
      }),
      { numRuns: 60 },
    );
  });

  it('puts a pure tone into one bin', () => {
    const n = 360;
    const tone = Float64Array.from({ length: n }, (_, t) => cos((2 * Math.PI * 7 * t) / n));
    const { real } = same((k) => k.realSpectrum(tone));
    expect(real[7]).toBeCloseTo(n / 2, 9);
  });
});

describe('iterative amplitude-adjusted surrogates', () => {
  const autoregression = (n: number, phi: number, seed: number) => {
    const random = createRandom(seed);
    const x = new Float64Array(n);
    for (let t = 1; t < n; t++) x[t] = phi * x[t - 1]! + random.normal();
    return x;
  };

  it('are permutations of the values (exact; Theiler et al. 1992) with the same bits on every backend', () => {
    fc.assert(
      fc.property(
        fc.constantFrom(...LENGTHS.filter((n) => n >= 8)),
        fc.integer({ min: 0, max: 1e6 }),
        fc.boolean(),
        (n, seed, coarse) => {
          const raw = autoregression(n, 0.8, seed);
          const values = coarse ? raw.map((v) => Math.round(2 * v) / 2) : raw;
          const permutation = createRandom(seed, 1).permutation(n);
          const result = same((k) => k.surrogate({ values, permutation, iterations: 20 }));
          expect(Float64Array.from(result.values).sort()).toEqual(values.slice().sort());
        },
      ),
      { numRuns: 40 },
    );
  });

  it('keep the periodogram closely once converged', () => {
    const values = autoregression(1000, 0.9, 5);
    const { values: made, converged } = same((k) =>
      k.surrogate({ values, permutation: createRandom(5, 1).permutation(1000), iterations: 500 }),
    );
    expect(converged).toBe(true);
    const kernels = backends[0]!;
    const [a, b] = [kernels.realSpectrum(values), kernels.realSpectrum(made)];
    let off = 0;
    let total = 0;
    for (let k = 1; k < a.real.length; k++) {
      const [x, y] = [a, b].map((s) => Math.sqrt(s.real[k]! ** 2 + s.imaginary[k]! ** 2)) as [number, number];
      off += (x - y) ** 2;
      total += x * x;
    }
    // Schreiber & Schmitz 1996 report residual spectral discrepancies well under a percent.
    expect(off / total).toBeLessThan(0.001);
    // And it is another series.
    expect(made).not.toEqual(values);
  });

  it('go on from the ranks of an earlier call with the same bits', () => {
    const values = autoregression(500, 0.7, 9);
    const permutation = createRandom(9, 1).permutation(500);
    const whole = same((k) => k.surrogate({ values, permutation, iterations: 12 }));
    const half = same((k) => k.surrogate({ values, permutation, iterations: 5 }));
    const rest = same((k) => k.surrogate({ values, permutation: half.ranks, iterations: 7 }));
    expect(rest.values).toEqual(whole.values);
    expect(half.iterations + rest.iterations).toBe(whole.iterations);
  });

  it('survive a constant and a two-valued series', () => {
    for (const values of [new Float64Array(64).fill(3), Float64Array.from({ length: 64 }, (_, t) => t % 2)]) {
      const made = same((k) =>
        k.surrogate({ values, permutation: createRandom(1).permutation(64), iterations: 10 }),
      );
      expect(Float64Array.from(made.values).sort()).toEqual(values.slice().sort());
    }
  });
});
