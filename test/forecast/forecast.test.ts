import { beforeAll, describe, expect, it } from 'vitest';
import type { Compute } from '../../src/base/compute.ts';
import { openKernels } from '../../src/core/open.ts';
import { forecast } from '../../src/forecast/forecast.ts';
import type { ForecastResult } from '../../src/forecast/types.ts';
import {
  expectFinding,
  inlineCompute,
  lorenz,
  plus,
  prepare,
  roessler,
  shape,
  unknown,
  white,
} from './helpers.ts';

let compute: Compute;
beforeAll(async () => {
  compute = inlineCompute(await openKernels({ backend: 'js' }));
});
const defaults = { seed: 1, noise: unknown, largest: unknown };

async function ahead(samples: Float64Array, count: number, steps: number): Promise<ForecastResult> {
  const record = prepare(samples.slice(0, count), 0.3);
  const result = await forecast(record, shape(record, 5, 3, 30, 5), { ...defaults, steps }, compute);
  if ('ok' in result) throw new Error(result.why);
  return result;
}

describe('forecast', () => {
  it('continues the record, and its intervals hold what comes at the stated share', async () => {
    let inside = 0;
    let all = 0;
    for (let seed = 0; seed < 6; seed++) {
      const samples = plus(roessler(1900, 53 * seed), white(1900, seed, 0.25));
      for (const count of [1600, 1700, 1800]) {
        const result = await ahead(samples, count, 30);
        expect(result.time[29]).toBeCloseTo(9, 12);
        for (let h = 0; h < 30; h++) {
          expect(result.low[h]!).toBeLessThanOrEqual(result.values[h]!);
          expect(result.high[h]!).toBeGreaterThanOrEqual(result.values[h]!);
          const truth = samples[count + h]!;
          if (truth >= result.low[h]! && truth <= result.high[h]!) inside++;
          all++;
        }
      }
    }
    // 18 paths of 30 leads; neighbouring leads go together: about 5 independent ones a path. Two standard
    // errors of a share of 0.9 from 90 are 6.3 %.
    expect(inside / all).toBeGreaterThan(0.9 - 0.063);
    expect(inside / all).toBeLessThanOrEqual(1);
  });

  it('is near the truth while it is to be trusted', async () => {
    const samples = lorenz(4100);
    const record = prepare(samples.slice(0, 4000), 0.05);
    const result = await forecast(record, shape(record, 3, 4, 20, 5), { ...defaults, steps: 40 }, compute);
    if ('ok' in result) throw new Error(result.why);
    const trusted = expectFinding(result.trusted).value;
    const tolerance = 0.5 * record.stds[0]!;
    result.time.forEach((time, h) => {
      if (time <= trusted + 1e-9)
        expect(Math.abs(result.values[h]! - samples[4000 + h]!)).toBeLessThan(tolerance);
    });
    expect(trusted).toBeGreaterThan(0.5);
  });

  it('white noise: the mean with wide intervals and nothing to trust', async () => {
    const samples = white(2000, 4);
    const record = prepare(samples);
    const result = await forecast(record, shape(record, 1, 3, 5, 1), { ...defaults, steps: 5 }, compute);
    if ('ok' in result) throw new Error(result.why);
    expect(result.trusted).toMatchObject({ ok: false, code: 'NO_SKILL' });
    for (let h = 0; h < 5; h++) {
      expect(result.values[h]!).toBeCloseTo(record.means[0]!, 12);
      // exact: 5 and 95 % points of the standard normal, ±1.645; three standard errors from 1,000 origins, 0.2.
      expect(Math.abs(result.high[h]! - result.values[h]! - 1.645)).toBeLessThan(0.2);
      expect(Math.abs(result.values[h]! - result.low[h]! - 1.645)).toBeLessThan(0.2);
    }
  });

  it('refuses more steps than errors can be measured for, and a record that ends in a gap', async () => {
    const samples = roessler(1500);
    const record = prepare(samples, 0.3);
    const rebuilt = shape(record, 5, 3, 30, 5);
    const far = await forecast(record, rebuilt, { ...defaults, steps: 1000 }, compute);
    expect(far).toMatchObject({ ok: false, code: 'TOO_SHORT' });
    samples[1498] = Number.NaN;
    const gap = prepare(samples, 0.3);
    const ended = await forecast(gap, shape(gap, 5, 3, 30, 5), { ...defaults, steps: 5 }, compute);
    expect(ended).toMatchObject({ ok: false, code: 'NOT_APPLICABLE' });
  });
});
