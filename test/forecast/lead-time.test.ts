import { beforeAll, describe, expect, it } from 'vitest';
import type { Compute } from '../../src/base/compute.ts';
import { openKernels } from '../../src/core/open.ts';
import { estimateLeadTime } from '../../src/forecast/lead-time.ts';
import type { LeadTimeResult } from '../../src/forecast/types.ts';
import {
  autoregressive,
  expectFinding,
  henon,
  inlineCompute,
  known,
  lorenz,
  lorenzPair,
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

/** What must hold of every result. */
function expectSound(result: LeadTimeResult, interval: number): void {
  expect(JSON.stringify(result)).not.toMatch(/NaN|Infinity|null/);
  expect(result.curve.length).toBeLessThanOrEqual(200);
  for (const point of result.curve)
    for (const v of Object.values(point)) expect(Number.isFinite(v)).toBe(true);
  for (let i = 1; i < result.curve.length; i++)
    expect(result.curve[i]!.within).toBeLessThanOrEqual(result.curve[i - 1]!.within);
  if (result.trusted.ok) {
    expect(result.trusted.value).toBeGreaterThanOrEqual(interval * 0.999);
    if (result.median.ok) expect(result.median.value).toBeGreaterThanOrEqual(result.trusted.value);
    // The curve shows the same share as the bound promises (it may be decimated: take the last lead before).
    const inside = result.curve.filter((p) => p.lead <= (result.trusted as { value: number }).value * 1.0001);
    expect(inside[inside.length - 1]!.within).toBeGreaterThanOrEqual(result.confidence - 0.002);
  }
}

describe('lead time of deterministic records', () => {
  it('Lorenz system: some Lyapunov times, limited by the record, with the gain per digit', async () => {
    const record = prepare(lorenz(4000), 0.05, { unit: 'K' });
    const largest = known(0.9056); // published, Sprott 2003
    const result = await estimateLeadTime(
      record,
      shape(record, 3, 4, 20, 5),
      { ...defaults, largest },
      compute,
    );
    expectSound(result, 0.05);
    const trusted = expectFinding(result.trusted);
    // One Lyapunov time is 1.10. A tenth of paths may leave, so 90 % bounds lie below the two dozen Lyapunov
    // times that the best full-state methods reach at the median (arXiv 2303.08011).
    expect(trusted.value).toBeGreaterThan(1.1);
    expect(trusted.value).toBeLessThan(10);
    expect(trusted.unit).toBe('s');
    expect(trusted.low).toBeLessThanOrEqual(trusted.value);
    expect(trusted.high).toBeGreaterThan(trusted.low);
    expect(expectFinding(result.median).value).toBeGreaterThan(trusted.value);
    expect(['record', 'divergence']).toContain(result.limitedBy);
    // exact: ln 10 / λ₁
    expect(expectFinding(result.perDecimalDigit).value).toBeCloseTo(Math.log(10) / 0.9056, 10);
    expect(expectFinding(result.perDecimalDigit).low).toBeCloseTo(Math.log(10) / (0.9056 * 1.05), 10);
    const now = expectFinding(result.now);
    expect(now.value).toBeGreaterThan(0.2);
  });

  it('Lorenz system seen by a poor sensor: shorter, limited by the sensor, with a table of digits', async () => {
    const clean = lorenz(4000);
    const record = prepare(plus(clean, white(4000, 2, 0.3)), 0.05);
    const options = { ...defaults, noise: known(0.3), largest: known(0.9056) };
    const noisy = await estimateLeadTime(record, shape(record, 3, 4, 20, 5), options, compute);
    expectSound(noisy, 0.05);
    const quiet = prepare(clean, 0.05);
    const reference = await estimateLeadTime(quiet, shape(quiet, 3, 4, 20, 5), defaults, compute);
    expect(expectFinding(noisy.trusted).value).toBeLessThan(0.75 * expectFinding(reference.trusted).value);
    expect(noisy.limitedBy).toBe('sensor');
    const today = noisy.sensorTable.find((row) => row.noise === 0.3)!;
    expect(today).toEqual({ noise: 0.3, trusted: expectFinding(noisy.trusted).value, measured: true });
    const better = noisy.sensorTable.filter((row) => row.noise < 0.3);
    expect(better.length).toBe(2);
    for (const row of better) {
      expect(row.measured).toBe(false);
      expect(row.trusted).toBeGreaterThan(today.trusted);
      // Never more per digit than exponential growth of small differences gives.
      const digits = Math.round(Math.log10(0.3 / row.noise));
      expect(row.trusted - today.trusted).toBeLessThanOrEqual((digits * Math.log(10)) / 0.9056 + 1e-9);
    }
    // Extrapolated one digit better must not exceed what such a sensor is measured to give.
    const finer = prepare(plus(clean, white(4000, 2, 0.03)), 0.05);
    const measured = await estimateLeadTime(finer, shape(finer, 3, 4, 20, 5), defaults, compute);
    const row = better.find((r) => Math.abs(r.noise - 0.03) < 1e-9)!;
    expect(row.trusted).toBeLessThanOrEqual(1.25 * expectFinding(measured.trusted).high);
  });

  it('Rössler system: a few cycles', async () => {
    const record = prepare(plus(roessler(4000), white(4000, 3, 0.05)), 0.3);
    const result = await estimateLeadTime(record, shape(record, 5, 3, 30, 5), defaults, compute);
    expectSound(result, 0.3);
    expect(expectFinding(result.trusted).value).toBeGreaterThan(6); // one cycle is about 5.9
  });

  it('Hénon map: steps, not time units of a flow', async () => {
    const record = prepare(plus(henon(3000), white(3000, 4, 0.005)));
    const options = { ...defaults, noise: known(0.005), largest: known(0.4192) };
    const result = await estimateLeadTime(record, shape(record, 1, 2, 3, 1), options, compute);
    expectSound(result, 1);
    // ln(0.36 / 0.005) / 0.419 = 10 steps for typical paths that start at the sensor's noise.
    expect(expectFinding(result.trusted).value).toBeGreaterThanOrEqual(3);
    expect(expectFinding(result.trusted).value).toBeLessThanOrEqual(10);
    expect(Number.isInteger(expectFinding(result.trusted).value)).toBe(true);
  });

  it('periodic record: at least as long as the record can test, no limit found', async () => {
    const samples = Float64Array.from(
      { length: 3000 },
      (_, t) => Math.sin(0.1 * t) + 0.3 * Math.cos(0.2 * t + 1),
    );
    const record = prepare(plus(samples, white(3000, 5, 0.01)), 0.25);
    const result = await estimateLeadTime(record, shape(record, 12, 3, 60, 12), defaults, compute);
    expectSound(result, 0.25);
    const trusted = expectFinding(result.trusted);
    expect(trusted.bound).toBe('lower');
    expect(trusted.value).toBeCloseTo(300 * 0.25, 9); // a tenth of the record
    expect(result.limitedBy).toBe('none-found');
  });

  it('two channels: the second channel can be the target', async () => {
    const [x, z] = lorenzPair(3000);
    const record = prepare([plus(x, white(3000, 6, 0.1)), plus(z, white(3000, 7, 0.1))], 0.05, {
      target: 1,
      channelUnits: ['K', 'bar'],
    });
    const result = await estimateLeadTime(record, shape(record, 3, 2, 15, 5), defaults, compute);
    expectSound(result, 0.05);
    expect(expectFinding(result.trusted).value).toBeGreaterThan(0.3);
    expect(result.tolerance).toBeCloseTo(0.5 * record.stds[1]!, 12);
  });

  it('gaps: paths and states beside them are left out, the answer stays near', async () => {
    const samples = lorenz(4000);
    const whole = prepare(samples, 0.05);
    const holed = samples.slice();
    for (let t = 350; t < 4000; t += 400) holed.fill(Number.NaN, t, t + 8);
    const record = prepare(holed, 0.05);
    const a = await estimateLeadTime(whole, shape(whole, 3, 4, 20, 5), defaults, compute);
    const b = await estimateLeadTime(record, shape(record, 3, 4, 20, 5), defaults, compute);
    expectSound(b, 0.05);
    expect(expectFinding(b.trusted).high).toBeGreaterThanOrEqual(expectFinding(a.trusted).low * 0.8);
    expect(expectFinding(b.trusted).value).toBeLessThanOrEqual(expectFinding(a.trusted).high * 1.1);
  });
});

describe('lead time of stochastic records', () => {
  it('white noise: refused, no forecast beats the mean', async () => {
    for (const seed of [1, 2, 3]) {
      const record = prepare(white(3000, seed));
      const result = await estimateLeadTime(record, shape(record, 1, 3, 5, 1), defaults, compute);
      expectSound(result, 1);
      expect(result.trusted).toMatchObject({ ok: false, code: 'NO_SKILL' });
      expect(result.now).toMatchObject({ ok: false, code: 'NO_SKILL' });
      expect(result.sensorTable).toEqual([]);
    }
  });

  it('white noise at a wide tolerance: refused too, the mean serves as well', async () => {
    const record = prepare(white(3000, 4));
    const result = await estimateLeadTime(
      record,
      shape(record, 1, 3, 5, 1),
      { ...defaults, tolerance: 3 },
      compute,
    );
    expect(result.trusted).toMatchObject({ ok: false, code: 'NO_SKILL' });
  });

  it('linear noise: the linear model forecasts it, for less than a correlation time', async () => {
    const record = prepare(autoregressive(4000, 5, 0.98));
    // Correlation time 1/(1 − 0.98) = 50 steps.
    const result = await estimateLeadTime(record, shape(record, 10, 3, 60, 50), defaults, compute);
    expectSound(result, 1);
    expect(result.predictor).toMatch(/linear autoregression|persistence/);
    expect(expectFinding(result.trusted).value).toBeLessThan(50);
    // exact: the linear forecast's error after h steps has variance (1 − a^2h)/(1 − a²), so a path that held
    // for h steps held at h: P(|error| > tolerance) ≤ 0.1 needs 1.645 · sd(h) ≤ tolerance = 2.51, h ≤ 2.3.
    expect(expectFinding(result.trusted).value).toBeLessThanOrEqual(3);
  });

  it('very wide tolerance on a deterministic record: refused, the mean never leaves it', async () => {
    const record = prepare(roessler(2000), 0.3);
    const result = await estimateLeadTime(
      record,
      shape(record, 5, 3, 30, 5),
      { ...defaults, tolerance: 100 },
      compute,
    );
    expect(result.trusted).toMatchObject({ ok: false, code: 'NO_SKILL' });
  });
});

describe('refusals', () => {
  it('too short for held-out forecasts, or for the confidence asked', async () => {
    const record = prepare(roessler(120), 0.3);
    const short = await estimateLeadTime(record, shape(record, 5, 3, 30, 5), defaults, compute);
    expectSound(short, 0.3);
    expect(short.trusted).toMatchObject({ ok: false, code: 'TOO_SHORT' });
    expect(short.limitedBy).toBe('record');

    const longer = prepare(roessler(1500), 0.3);
    const options = { ...defaults, confidence: 0.99 };
    const sure = await estimateLeadTime(longer, shape(longer, 5, 3, 40, 5), options, compute);
    // 1,500 samples hold about 36 stretches of 41 samples; 99 % needs 99.
    expect(sure.trusted).toMatchObject({ ok: false, code: 'TOO_SHORT', parameters: { needed: 99 } });
  });

  it('now: refused after a gap and in a state never seen', async () => {
    const samples = roessler(3000);
    const gap = samples.slice();
    gap[2996] = Number.NaN;
    const record = prepare(gap, 0.3);
    const result = await estimateLeadTime(record, shape(record, 5, 3, 30, 5), defaults, compute);
    expectFinding(result.trusted);
    expect(result.now).toMatchObject({ ok: false, code: 'NOT_APPLICABLE' });

    const jump = samples.slice();
    jump[2999] = 60; // the attractor lies within −10 … 12
    const odd = prepare(jump, 0.3);
    const unlike = await estimateLeadTime(odd, shape(odd, 5, 3, 30, 5), defaults, compute);
    expect(unlike.now).toMatchObject({ ok: false, code: 'TOO_SHORT' });
  });

  it('gain per digit: refused with the exponent, or when it may be zero', async () => {
    const record = prepare(roessler(1500), 0.3);
    const rebuilt = shape(record, 5, 3, 30, 5);
    const without = await estimateLeadTime(record, rebuilt, defaults, compute);
    expect(without.perDecimalDigit).toMatchObject({ ok: false, code: 'NOISE_FLOOR' });
    const flat = await estimateLeadTime(record, rebuilt, { ...defaults, largest: known(0.07, 1.2) }, compute);
    expect(flat.perDecimalDigit).toMatchObject({ ok: false, code: 'NO_EXPONENTIAL_GROWTH' });
  });
});
