import { describe, expect, it } from 'vitest';
import type { Answer } from '../../src/base/answer.ts';
import { estimateDivergence } from '../../src/divergence/largest.ts';
import { reconstruct } from '../../src/reconstruct/reconstruct.ts';
import { openCompute, prepare } from '../geometry/compute.ts';
import {
  autoregressive,
  coloured,
  deviation,
  lorenz,
  plus,
  randomWalk,
  resonance,
  sine,
  torus,
  white,
} from '../geometry/records.ts';

const compute = await openCompute();
const unknown: Answer = { ok: false, code: 'NOISE_FLOOR', why: 'Not estimated here.', remedy: 'None.' };

async function divergenceOf(samples: Float64Array | Float64Array[], interval = 1, noise: Answer = unknown) {
  const record = prepare(samples, interval);
  const reconstruction = await reconstruct(record, { seed: 1 }, compute);
  if ('ok' in reconstruction) return { largest: reconstruction, curve: null };
  return estimateDivergence(record, reconstruction, { seed: 1, noise }, compute);
}

describe('records without exponential growth are refused', () => {
  const cases: [string, (seed: number) => Float64Array][] = [
    ['white noise', (s) => white(2000, s)],
    ['autoregressive noise, 0.9', (s) => autoregressive(2000, s, 0.9)],
    ['autoregressive noise, 0.99', (s) => autoregressive(2000, s, 0.99)],
    ['autoregressive noise, −0.9', (s) => autoregressive(2000, s, -0.9)],
    ['noise of spectrum 1/f', (s) => coloured(2000, s, 1)],
    ['noise of spectrum 1/f²', (s) => coloured(2000, s, 2)],
    ['random walk', (s) => randomWalk(2000, s)],
    ['noise through a resonance', (s) => resonance(2000, s, 12, 0.95)],
    ['noise through a sharp resonance', (s) => resonance(3000, s, 25, 0.999)],
    ['smooth noise', (s) => resonance(2000, s, 1e9, 0.8)],
    ['a sine', (s) => sine(2000, 17.3 + s)],
    ['a sine with noise', (s) => plus(sine(2000, 17.3 + s), white(2000, s, 0.05))],
    ['two tones', (s) => torus(2000, 17 + 0.37 * s)],
    ['two tones with noise', (s) => plus(torus(2000, 17 + 0.37 * s), white(2000, s, 0.01))],
    ['a short cycle', () => Float64Array.from({ length: 2000 }, (_, t) => [0, 3, 1, 7, 2][t % 5]!)],
  ];
  it.each(cases)('%s', async (_, make) => {
    for (const seed of [1, 2]) {
      const { largest } = await divergenceOf(make(seed));
      expect(largest).toMatchObject({ ok: false });
      if (!largest.ok) expect(largest.remedy.length).toBeGreaterThan(10);
    }
  });

  it('noise that leaves less than two e-folds says so', async () => {
    const clean = lorenz(4000);
    const sigma = 0.08 * deviation(clean);
    const { largest } = await divergenceOf(plus(clean, white(4000, 3, sigma)), 0.05, {
      ok: true,
      value: sigma,
      low: sigma,
      high: sigma,
      level: 0.9,
      unit: '',
      method: 'given',
    });
    expect(largest).toMatchObject({ ok: false, code: 'NOISE_FLOOR' });
  });
});
