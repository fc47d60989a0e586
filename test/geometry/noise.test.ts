import { describe, expect, it } from 'vitest';
import { errorFunction } from '../../src/geometry/error-function.ts';
import { estimateNoise } from '../../src/geometry/noise.ts';
import { noiseGrowth } from '../../src/geometry/noise-floor.ts';
import { reconstruct } from '../../src/reconstruct/reconstruct.ts';
import { openCompute, prepare } from './compute.ts';
import {
  autoregressive,
  coloured,
  deviation,
  henon,
  logistic,
  lorenz,
  plus,
  quantised,
  roessler,
  white,
} from './records.ts';

const compute = await openCompute();

async function levelOf(samples: Float64Array, interval = 1, seed = 1) {
  const record = prepare(samples, interval);
  const reconstruction = await reconstruct(record, { seed }, compute);
  if ('ok' in reconstruction) throw new Error(reconstruction.why);
  return (await estimateNoise(record, reconstruction, { seed }, compute)).level;
}

describe('noise level', () => {
  it('error function: values of Abramowitz & Stegun 1964, Table 7.1 (published, from memory)', () => {
    expect(errorFunction(0)).toBe(0);
    expect(errorFunction(0.5)).toBeCloseTo(0.5204998778, 10);
    expect(errorFunction(1)).toBeCloseTo(0.8427007929, 10);
    expect(errorFunction(2)).toBeCloseTo(0.995322265, 10);
    expect(errorFunction(4)).toBeCloseTo(1, 7);
  });

  it('growth of the slope per dimension falls from 1 to 0 through the level (exact limits)', () => {
    expect(noiseGrowth(1e-3, 1)).toBeCloseTo(1, 5);
    expect(noiseGrowth(12, 1)).toBeCloseTo(0, 5);
    expect(noiseGrowth(1, 1)).toBeGreaterThan(noiseGrowth(2, 1));
  });

  const motions: [string, Float64Array, number][] = [
    ['Hénon map', henon(5000), 1],
    ['logistic map', logistic(5000), 1],
    ['Lorenz system', lorenz(5000), 0.05],
    ['Rössler system', roessler(5000), 0.3],
  ];
  it('intervals hold the level that was added, two-sided or as an upper bound', async () => {
    let held = 0;
    let tried = 0;
    for (const [, clean, interval] of motions)
      for (const share of [0.01, 0.05, 0.15]) {
        const sigma = share * deviation(clean);
        const level = await levelOf(plus(clean, white(clean.length, 11, sigma)), interval);
        tried++;
        if (!level.ok) continue;
        if (level.high >= sigma && (level.bound === 'upper' || level.low <= sigma)) held++;
        // Whatever it says must be of use: never more than three times the truth.
        expect(level.high).toBeLessThan(3 * sigma);
      }
    // Nominal 90 %: with 12 tries, 9 or more in 97 % of runs.
    expect(held).toBeGreaterThanOrEqual(9);
    expect(tried).toBe(12);
  });

  it('a clean record gets an upper bound, not a number', async () => {
    for (const [, clean, interval] of motions) {
      const level = await levelOf(clean, interval);
      expect(level).toMatchObject({ ok: true, bound: 'upper' });
      if (level.ok) expect(level.high).toBeLessThan(0.02 * deviation(clean));
    }
  });

  it('a quantiser’s step is noise of step/√12 (exact: uniform rounding; IEEE Std 1241)', async () => {
    const step = 0.3;
    const level = await levelOf(quantised(henon(5000), step));
    if (!level.ok) throw new Error(level.why);
    expect(level.high).toBeGreaterThanOrEqual(step / Math.sqrt(12));
    expect(level.low).toBeLessThanOrEqual(step / Math.sqrt(12));
  });

  it('white noise is noise altogether; coloured noise is no rule plus independent noise', async () => {
    const level = await levelOf(white(3000, 4, 2.5));
    if (!level.ok) throw new Error(level.why);
    expect(level.low).toBeLessThanOrEqual(2.5);
    expect(level.high).toBeGreaterThanOrEqual(2.5);
    for (const samples of [autoregressive(3000, 2, 0.99), coloured(2000, 2, 1)])
      expect(await levelOf(samples)).toMatchObject({ ok: false, code: 'NOT_APPLICABLE' });
  });
});
