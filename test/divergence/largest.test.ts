import { describe, expect, it } from 'vitest';
import type { Answer } from '../../src/base/answer.ts';
import { followAcrossFlow } from '../../src/divergence/across-flow.ts';
import { estimateDivergence } from '../../src/divergence/largest.ts';
import { reconstruct } from '../../src/reconstruct/reconstruct.ts';
import { openCompute, prepare, shape } from '../geometry/compute.ts';
import { henon, lorenz, roessler } from '../geometry/records.ts';

const compute = await openCompute();
const unknown: Answer = { ok: false, code: 'NOISE_FLOOR', why: 'Not estimated here.', remedy: 'None.' };

async function divergenceOf(samples: Float64Array | Float64Array[], interval = 1, noise: Answer = unknown) {
  const record = prepare(samples, interval);
  const reconstruction = await reconstruct(record, { seed: 1 }, compute);
  if ('ok' in reconstruction) return { largest: reconstruction, curve: null };
  return estimateDivergence(record, reconstruction, { seed: 1, noise }, compute);
}

describe('records with it', () => {
  it('intervals hold the truth: Hénon 0.4192, Lorenz 0.9056, Rössler 0.0715 (published web, Sprott 2003)', async () => {
    let [held, tried] = [0, 0];
    const cases: [number, (seed: number) => Float64Array, number][] = [
      [0.4192, (s) => henon(3000, s), 1],
      [0.9056, (s) => lorenz(4000, 0.05, 7 * s), 0.05],
      [0.0715, (s) => roessler(6000, 0.3, 5 * s), 0.3],
    ];
    for (const [truth, make, interval] of cases)
      for (const seed of [1, 2, 3]) {
        const { largest } = await divergenceOf(make(seed), interval);
        if (!largest.ok) continue;
        tried++;
        if (largest.low <= truth && truth <= largest.high) held++;
      }
    expect(tried).toBeGreaterThanOrEqual(7);
    // Nominal 90 %: one miss or none of nine in 77 % of runs, and the records are fixed.
    expect(held).toBeGreaterThanOrEqual(tried - 1);
  });

  it('the curve is in the record’s unit, and its fit lies on it', async () => {
    const x = henon(2000).map((v) => 64 * v);
    const { largest, curve } = await divergenceOf(x, 0.5);
    if (!largest.ok || curve === null || curve.fit === null) throw new Error('refused');
    const { from, to, slope, intercept } = curve.fit;
    expect(slope).toBe(largest.value);
    for (const [i, t] of curve.time.entries())
      if (t >= from && t <= to) expect(curve.nearest[i]!).toBeCloseTo(intercept + slope * t, 0);
    expect(curve.ceiling).toBeCloseTo(Math.log(64) + 0.1, 0);
    // Per time unit: half a unit per step doubles the rate.
    expect(largest.value).toBeCloseTo(2 * 0.42, 1);
  });

  it('follows no pair over a gap', async () => {
    const x = lorenz(5000);
    x.fill(Number.NaN, 2400, 2500);
    const { largest } = await divergenceOf(x, 0.05);
    if (!largest.ok) throw new Error(largest.why);
    expect(largest.low).toBeLessThan(0.9056);
    expect(largest.high).toBeGreaterThan(0.9056);
  });

  it('takes several channels', async () => {
    const a = henon(2500);
    const { largest } = await divergenceOf([a, a.map((v, t) => 0.3 * (t > 0 ? a[t - 1]! : v))]);
    if (!largest.ok) throw new Error(largest.why);
    expect(Math.abs(largest.value - 0.4192)).toBeLessThan(0.05);
  });

  it('gives the same bits on every backend', async () => {
    const record = prepare(lorenz(1500), 0.05);
    const results = [];
    for (const backend of ['js', 'wasm-scalar', 'wasm-simd'] as const)
      results.push(
        await estimateDivergence(
          record,
          shape(record, 3, 3, 8, 6),
          { seed: 1, noise: unknown },
          await openCompute(backend),
        ),
      );
    expect(results[1]).toEqual(results[0]);
    expect(results[2]).toEqual(results[0]);
  });
});

describe('distance across the flow', () => {
  it('of two points on one circle at different phases is that of the chord across it', () => {
    // Same orbit, 3 samples apart, no shift allowed: the difference lies along the mean velocity (exact by symmetry).
    const n = 400;
    const data = Float64Array.from({ length: 2 * n }, (_, i) =>
      i < n ? Math.cos(i / 10) : 2 * Math.sin((i - n) / 10),
    );
    const vectors = { data, starts: new Int32Array(0), offsets: Int32Array.of(0, n) };
    const same = followAcrossFlow(vectors, Int32Array.of(20), Int32Array.of(23), 5, 0);
    // The chord of an ellipse is parallel to the mean of its velocities: nothing is left across.
    for (let s = 0; s <= 5; s++)
      expect(same.counts[s] === 0 || same.logSums[s]! / same.counts[s]! < Math.log(1e-6)).toBe(true);
    // With a shift the second orbit waits for the first and they coincide.
    const shifted = followAcrossFlow(vectors, Int32Array.of(20), Int32Array.of(23), 5, 5);
    expect(shifted.counts[4]).toBe(0);
  });
});
