import { describe, expect, it } from 'vitest';
import { estimateDimension } from '../../src/geometry/dimension.ts';
import { reconstruct } from '../../src/reconstruct/reconstruct.ts';
import { openCompute, prepare, shape } from './compute.ts';
import {
  autoregressive,
  coloured,
  henon,
  lorenz,
  plus,
  randomWalk,
  resonance,
  sine,
  torus,
  white,
} from './records.ts';

const compute = await openCompute();

async function dimensionOf(samples: Float64Array, interval = 1, seed = 1) {
  const record = prepare(samples, interval);
  const reconstruction = await reconstruct(record, { seed }, compute);
  if ('ok' in reconstruction) return { correlation: reconstruction, entropy: reconstruction, curve: null };
  return estimateDimension(record, reconstruction, { seed }, compute);
}

describe('records without a finite dimension are refused', () => {
  const cases: [string, (seed: number) => Float64Array][] = [
    ['white noise', (s) => white(2000, s)],
    ['autoregressive noise, 0.9', (s) => autoregressive(3000, s, 0.9)],
    ['autoregressive noise, 0.99', (s) => autoregressive(3000, s, 0.99)],
    ['noise of spectrum 1/f', (s) => coloured(2000, s, 1)],
    ['noise of spectrum 1/f² (Osborne & Provenzale 1989)', (s) => coloured(2000, s, 2)],
    ['noise of spectrum 1/f³', (s) => coloured(1500, s, 3)],
    ['random walk', (s) => randomWalk(3000, s)],
    ['noise through a resonance', (s) => resonance(3000, s, 20, 0.98)],
    ['noise through a sharp resonance', (s) => resonance(4000, s, 20, 0.9995)],
  ];
  it.each(cases)('%s', async (_, make) => {
    for (const seed of [1, 3]) {
      const { correlation, entropy } = await dimensionOf(make(seed));
      expect(correlation).toMatchObject({ ok: false });
      expect(entropy.ok).toBe(false);
      if (!correlation.ok) {
        expect(correlation.why).toMatch(/\d/);
        expect(correlation.remedy.length).toBeGreaterThan(10);
      }
    }
  });

  it('noise below motion that leaves less than a factor of 4', async () => {
    const { correlation } = await dimensionOf(plus(sine(4000, 20.3711), white(4000, 3, 0.1)));
    expect(correlation).toMatchObject({ ok: false });
  });
});

describe('records with one', () => {
  it('a sine: 1, and an entropy bounded near 0', async () => {
    const { correlation, entropy, curve } = await dimensionOf(sine(4000, 20.3777));
    if (!correlation.ok || !entropy.ok) throw new Error('refused');
    expect(correlation.low).toBeLessThanOrEqual(1);
    expect(correlation.high).toBeGreaterThanOrEqual(1);
    expect(correlation.high - correlation.low).toBeLessThan(0.3);
    expect(entropy.bound).toBe('upper');
    expect(entropy.high).toBeLessThan(0.01);
    expect(curve!.region!.high / curve!.region!.low).toBeGreaterThanOrEqual(4);
  });

  it('two tones: 2, or a refusal where they come back too seldom', async () => {
    let found = 0;
    for (const seed of [1, 2, 3, 4, 5, 6]) {
      const { correlation } = await dimensionOf(torus(2000, 17 + 0.37 * seed));
      if (!correlation.ok) continue;
      found++;
      expect(correlation.low).toBeLessThanOrEqual(2);
      expect(correlation.high).toBeGreaterThanOrEqual(2);
    }
    expect(found).toBeGreaterThanOrEqual(3);
  });

  it('curves are in the record’s unit and scale with it', async () => {
    const x = henon(3000);
    const plain = await dimensionOf(x);
    // A power of two, so that scaled values keep their bits.
    const large = await dimensionOf(x.map((v) => 1024 * v));
    if (!plain.correlation.ok || !large.correlation.ok) throw new Error('refused');
    expect(large.correlation.value).toBeCloseTo(plain.correlation.value, 9);
    expect(large.curve!.region!.low).toBeCloseTo(1024 * plain.curve!.region!.low, 6);
    expect(large.curve!.radius[5]!).toBeCloseTo(1024 * plain.curve!.radius[5]!, 6);
  });

  it('a gap changes little', async () => {
    const x = lorenz(6000);
    x.fill(Number.NaN, 2500, 2600);
    const { correlation } = await dimensionOf(x, 0.05);
    if (!correlation.ok) throw new Error(correlation.why);
    expect(correlation.low).toBeLessThan(2.06);
    expect(correlation.high).toBeGreaterThan(2.04);
  });

  it('gives the same bits on every backend', async () => {
    const record = prepare(henon(1500));
    const results = [];
    for (const backend of ['js', 'wasm-scalar', 'wasm-simd'] as const)
      results.push(
        await estimateDimension(record, shape(record, 1, 2, 1, 1), { seed: 1 }, await openCompute(backend)),
      );
    expect(results[1]).toEqual(results[0]);
    expect(results[2]).toEqual(results[0]);
  });
});
