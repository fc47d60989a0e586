import { beforeAll, describe, expect, it } from 'vitest';
import { runToEnd } from '../../src/base/compute.ts';
import type { Kernels } from '../../src/base/kernels.ts';
import { openKernels } from '../../src/core/open.ts';
import { kaplanYorkeDimension } from '../../src/model/averages.ts';
import { spectrumTask } from '../../src/model/spectrum.ts';
import type { ModelSpectrum, Parameters } from '../../src/model/types.ts';

let kernels: Kernels;
beforeAll(async () => {
  kernels = await openKernels();
});

const spectrum = (name: string, duration: number, parameters: Parameters = {}): ModelSpectrum =>
  runToEnd(spectrumTask, kernels, { name, parameters, options: { duration } });
const values = (result: ModelSpectrum) => result.exponents.map((e) => (e.ok ? e.value : Number.NaN));

/** Within three joint standard errors: ours now, and the one stated beside the value. */
function agrees(result: ModelSpectrum, i: number, value: number, error: number): void {
  const joint = Math.sqrt(result.standardErrors[i]! ** 2 + error ** 2);
  expect(
    Math.abs(values(result)[i]! - value),
    `exponent ${i + 1} of ${result.model}: ${values(result)[i]} for ${value}`,
  ).toBeLessThanOrEqual(3 * joint);
}

describe('exact exponents', () => {
  it('logistic map r = 4: ln 2', () => agrees(spectrum('logistic', 400_000), 0, Math.LN2, 0));

  it('tent map of slope 2: ln 2 to rounding', () => {
    expect(values(spectrum('tent', 10_000))[0]).toBeCloseTo(Math.LN2, 9);
  });

  it('cat map: ±ln((3 + √5)/2) to rounding', () => {
    const [first, second] = values(spectrum('cat', 10_000));
    expect(first).toBeCloseTo(0.9624236501, 9);
    expect(second).toBeCloseTo(-0.9624236501, 9);
  });

  it('generalised baker’s map, p = 0.3, a = 0.25, b = 0.4: −p ln p − q ln q, p ln a + q ln b; D₁ 1.577763 (Farmer, Ott & Yorke 1983)', () => {
    const result = spectrum('baker', 400_000);
    agrees(result, 0, 0.610864, 5e-7);
    agrees(result, 1, -1.057292, 5e-7);
    // The Kaplan–Yorke dimension equals the information dimension of this map.
    if (!result.kaplanYorke.ok) throw new Error(result.kaplanYorke.why);
    expect(Math.abs(result.kaplanYorke.value - 1.577763)).toBeLessThan(
      2 * (result.kaplanYorke.high - result.kaplanYorke.low),
    );
  });

  it('Kaplan–Yorke map α = 0.2: ln 2 and ln α to rounding', () => {
    const [first, second] = values(spectrum('kaplan-yorke', 10_000));
    expect(first).toBeCloseTo(Math.LN2, 9);
    expect(second).toBeCloseTo(Math.log(0.2), 9);
  });

  it.each([
    ['henon', Math.log(0.3), {}],
    ['ikeda', 2 * Math.log(0.9), {}],
    ['lozi', Math.log(0.5), {}],
    ['generalised-henon', Math.log(0.1), {}],
    ['standard', 0, {}],
  ])('%s: the sum is ln|det J|', (name, sum, parameters) => {
    expect(spectrum(name, 20_000, parameters).checks.sum).toBeCloseTo(sum, 9);
  });

  it('standard map: exponents in pairs ±λ', () => {
    const [first, second] = values(spectrum('standard', 20_000, { k: 6 }));
    expect(first! + second!).toBeCloseTo(0, 9);
  });

  it.each([
    ['lorenz', -41 / 3],
    ['lorenz-wolf', -21],
    ['ueda', -0.05],
    ['quadratic-jerk', -2.017],
    ['lorenz-96', -40],
  ])('%s: the sum is the constant divergence', (name, divergence) => {
    const { checks } = spectrum(name, name === 'lorenz-96' ? 20 : 500);
    expect(checks.meanDivergence).toBeCloseTo(divergence, 6);
    // The integrator's own error, at the model's default step.
    expect(Math.abs(checks.sum! - divergence)).toBeLessThan(1e-4 * Math.abs(divergence));
    expect(checks.divergenceAgrees).toBe(true);
  });

  it('Kaplan–Yorke dimension of (0.9056, 0, −14.5723) is 2.06214', () => {
    // Exactly 2 + 0.9056 / 14.5723 = 2.062145…; the source gives it cut after five decimals.
    expect(kaplanYorkeDimension([0.9056, 0, -14.5723], 3)).toBeCloseTo(2.062145, 6);
  });

  it('the zero exponent of a flow is zero (Haken 1983)', () => {
    for (const name of ['lorenz', 'rossler', 'chua', 'ueda', 'quadratic-jerk', 'hyperchaotic-rossler'])
      expect(spectrum(name, 2000).checks, name).toMatchObject({ zeroAgrees: true });
  });
});

/** `ours`: the independent computation of the design notes (8(5,3) Runge–Kutta, 1e5–2e6 time units), ± standard error. */
describe('independent computation in other code (ours)', () => {
  it.each([
    ['henon', 1e6, {}, 0.419187, 3.9e-5],
    ['ikeda', 4e5, {}, 0.50774, 1e-4],
    ['lozi', 1e6, {}, 0.470174, 2.7e-5],
    ['standard', 4e5, { k: 6 }, 1.13651, 1.7e-4],
  ])('%s', (name, duration, parameters, value, error) => {
    agrees(spectrum(name, duration, parameters), 0, value, error);
  });

  it.each([
    ['lorenz', 8000, 0.905495, 8.9e-5],
    ['lorenz-wolf', 5000, 1.50276, 1.3e-4],
    ['rossler', 15_000, 0.07157, 1.2e-4],
    ['rossler-wolf', 15_000, 0.0888, 1.1e-4],
    ['hyperchaotic-rossler', 5000, 0.11178, 4.3e-4],
    ['chua', 10_000, 0.32687, 4.1e-4],
    ['ueda', 10_000, 0.10298, 3e-4],
    ['quadratic-jerk', 20_000, 0.055156, 4.1e-5],
  ])('%s', (name, duration, value, error) => {
    agrees(spectrum(name, duration), 0, value, error);
  });

  it('hyperchaotic Rössler, second exponent', () =>
    agrees(spectrum('hyperchaotic-rossler', 5000), 1, 0.02125, 2.2e-4));

  it('Lorenz-96, 40 variables: λ₁ 1.692 ± 0.008, 13 positive, Kaplan–Yorke 27.07', () => {
    const result = spectrum('lorenz-96', 200);
    agrees(result, 0, 1.692, 0.008);
    // Thirteen positive beside one zero: the fourteenth is zero within its error.
    expect(values(result).filter((v, i) => v > 3 * result.standardErrors[i]!).length).toBeGreaterThanOrEqual(
      12,
    );
    if (!result.kaplanYorke.ok) throw new Error(result.kaplanYorke.why);
    expect(Math.abs(result.kaplanYorke.value - 27.07)).toBeLessThan(0.5);
  });
});

/** Published values: agreement within the last digit given and three of our standard errors. */
describe('published exponents', () => {
  it.each([
    ['henon', 1e6, 0, 0.41922, 5e-6, 'Sprott 2003 (web)'],
    ['henon', 1e6, 1, -1.62319, 5e-6, 'Sprott 2003 (web)'],
    ['lorenz', 8000, 0, 0.9056, 5e-5, 'Sprott 2003 (web)'],
    ['lorenz', 8000, 2, -14.5723, 5e-5, 'Sprott 2003 (web)'],
    ['lorenz-wolf', 5000, 0, 1.497, 0.0035, 'Wolf et al. 1985: 2.16 bits'],
    ['rossler', 15_000, 0, 0.0714, 5e-5, 'Sprott 2003 (web)'],
    ['rossler', 15_000, 2, -5.3943, 5e-5, 'Sprott 2003 (web)'],
    ['rossler-wolf', 15_000, 0, 0.09, 0.0035, 'Wolf et al. 1985: 0.13 bits'],
    ['hyperchaotic-rossler', 5000, 0, 0.111, 0.0035, 'Wolf et al. 1985: 0.16 bits'],
    ['hyperchaotic-rossler', 5000, 1, 0.021, 0.0035, 'Wolf et al. 1985: 0.03 bits'],
    ['chua', 10_000, 0, 0.3271, 5e-5, 'Sprott 2003'],
    ['ueda', 10_000, 0, 0.1034, 5e-5, 'Sprott 2003'],
    ['quadratic-jerk', 20_000, 0, 0.0551, 5e-5, 'Sprott 1997 (web)'],
  ])('%s, %d, exponent %d: %d', (name, duration, i, value, digit) => {
    const result = spectrum(name, duration);
    expect(Math.abs(values(result)[i]! - value)).toBeLessThanOrEqual(digit + 3 * result.standardErrors[i]!);
  });

  it('Kaplan–Yorke dimensions: Hénon 1.25827, Lorenz 2.06215, Rössler 2.0132 (Sprott 2003, web)', () => {
    for (const [name, duration, value] of [
      ['henon', 1e6, 1.25827],
      ['lorenz', 8000, 2.06215],
      ['rossler', 15_000, 2.0132],
    ] as const) {
      const { kaplanYorke } = spectrum(name, duration);
      if (!kaplanYorke.ok) throw new Error(kaplanYorke.why);
      expect(Math.abs(kaplanYorke.value - value), name).toBeLessThan(
        Math.max(1e-4, kaplanYorke.high - kaplanYorke.low),
      );
    }
  });
});
