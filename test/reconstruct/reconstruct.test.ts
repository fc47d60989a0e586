import { beforeAll, describe, expect, it } from 'vitest';
import type { Refusal } from '../../src/base/answer.ts';
import type { Compute } from '../../src/base/compute.ts';
import { openKernels } from '../../src/core/open.ts';
import { reconstruct } from '../../src/reconstruct/reconstruct.ts';
import type { Reconstruction, ReconstructOptions } from '../../src/reconstruct/types.ts';
import { prepareRecording } from '../../src/recording/prepare.ts';
import type { Recording } from '../../src/recording/types.ts';
import {
  autoregression,
  flow,
  henon,
  inline,
  lorenz,
  lorenzField,
  noisy,
  rossler,
  sine,
  white,
} from './records.ts';

let compute: Compute;
beforeAll(async () => {
  compute = inline(await openKernels({ backend: 'js' }));
});
const run = (samples: Recording['samples'], options: ReconstructOptions = {}, interval = 1) =>
  reconstruct(prepareRecording({ samples, interval }), { ...options, seed: 1 }, compute);
async function found(
  samples: Recording['samples'],
  options: ReconstructOptions = {},
): Promise<Reconstruction> {
  const result = await run(samples, options);
  if ('ok' in result) throw new Error(result.why);
  return result;
}
const least = (r: Reconstruction) => Math.min(...r.curves.candidates.map((c) => c.error));

describe('known systems', () => {
  it('Lorenz: three coordinates within a fraction of its cycle', async () => {
    const r = await found(lorenz(0.05, 5000));
    expect(r.dynamics).toBe('flow');
    expect(r.embeddingDimension).toBeGreaterThanOrEqual(3);
    expect(r.embeddingDimension).toBeLessThanOrEqual(4);
    expect(r.delay.samples).toBeGreaterThanOrEqual(2);
    expect(r.delay.samples).toBeLessThanOrEqual(6);
    expect(least(r)).toBeLessThan(0.05);
    expect(r.theilerWindow.samples).toBeGreaterThanOrEqual((r.delaysPerChannel - 1) * r.delay.samples);
  });

  it('Rössler', async () => {
    const r = await found(rossler(0.2, 5000));
    expect(r.embeddingDimension).toBeGreaterThanOrEqual(3);
    expect(r.embeddingDimension).toBeLessThanOrEqual(5);
    // A quarter of the period of about 5.9 time units is 7 samples.
    expect(r.delay.samples).toBeGreaterThanOrEqual(3);
    expect(r.delay.samples).toBeLessThanOrEqual(9);
    expect(least(r)).toBeLessThan(0.01);
  });

  it('Hénon: a map, delay 1, the two coordinates of its definition', async () => {
    const r = await found(henon(3000));
    expect([r.dynamics, r.delay.samples, r.correlationTime.samples]).toEqual(['map', 1, 1]);
    expect(r.embeddingDimension).toBe(2);
    expect(least(r)).toBeLessThan(1e-3);
  });

  it('logistic map: one coordinate is enough', async () => {
    let x = 0.3;
    const r = await found(
      Float64Array.from({ length: 3000 }, () => {
        x = 4 * x * (1 - x);
        return x;
      }),
    );
    expect([r.dynamics, r.embeddingDimension]).toEqual(['map', 1]);
  });

  it('a sine: two coordinates', async () => {
    const r = await found(sine(4000, 50.9));
    expect(r.embeddingDimension).toBe(2);
    expect(least(r)).toBeLessThan(1e-3);
  });

  it('two incommensurate tones: the four coordinates of a linear pair of oscillators', async () => {
    const tones = sine(5000, 50.9).map((v, i) => v + Math.sin(i * 0.1997));
    const r = await found(tones);
    expect(r.embeddingDimension).toBe(4);
  });

  it('white noise: nothing to forecast, and it says so', async () => {
    const r = await found(white(3000));
    expect(r.dynamics).toBe('map');
    expect(r.delay.samples).toBe(1);
    expect(r.delay.method).toMatch(/no candidate forecasts better than the mean/);
    expect(least(r)).toBeGreaterThan(0.95);
    expect(least(r)).toBeLessThan(1.2);
  });

  it('an autoregression is forecast as well as its theory allows, not better', async () => {
    const r = await found(autoregression(5000, 0.3));
    // exact: the best one-step forecast of φ = 0.3 has error √(1 − φ²) = 0.954 standard deviations.
    expect(Math.abs(least(r) - Math.sqrt(1 - 0.09))).toBeLessThan(0.1);
    expect(r.embeddingDimension).toBeLessThanOrEqual(2);
  });
});

describe('curves', () => {
  it('false neighbours of the Lorenz system vanish at three coordinates, Cao’s ratio levels off', async () => {
    const { curves } = await found(lorenz(0.05, 8000));
    const { fraction } = curves.falseNeighbours;
    expect(fraction[0]).toBeGreaterThan(0.9);
    expect(fraction[2]).toBeLessThan(0.1);
    expect(curves.cao.e1[0]).toBeLessThan(0.3);
    expect(curves.cao.e1[3]).toBeGreaterThan(0.85);
    // Cao 1997: E2 is 1 at every dimension only for noise.
    expect(Math.min(...curves.cao.e2)).toBeLessThan(0.7);
    expect(curves.cao.dimension.length).toBe(curves.cao.e2.length);
  });

  it('Cao’s E2 of white noise is near 1 throughout', async () => {
    const { cao } = (await found(white(5000))).curves;
    for (const e2 of cao.e2) expect(Math.abs(e2 - 1)).toBeLessThan(0.2);
  });

  it('space–time separation starts low and saturates near √2 of a standard deviation', async () => {
    const { separation } = (await found(lorenz(0.05, 5000))).curves;
    expect(separation.median[0]).toBeLessThan(0.4);
    const later = separation.median.slice(-20);
    expect(later.reduce((s, v) => s + v, 0) / later.length).toBeGreaterThan(0.9);
  });

  it('are plain finite numbers that survive JSON', async () => {
    for (const samples of [lorenz(0.05, 1500), white(400), sine(1000, 25)]) {
      const r = await found(samples);
      expect(JSON.parse(JSON.stringify(r))).toEqual(r);
      expect(JSON.stringify(r)).not.toMatch(/Infinity|NaN/);
    }
  });
});

describe('invariance', () => {
  it('of a power of two of gain: nothing changes', async () => {
    const samples = noisy(lorenz(0.05, 1500), 0.05);
    expect(await found(samples.map((v) => v * 1024))).toEqual(await found(samples));
  });

  it('of unit and offset: the same choice', async () => {
    const samples = noisy(henon(1500), 0.05);
    const plain = await found(samples);
    for (const [gain, offset] of [
      [1.8, 32],
      [1e-9, 1],
      [-3, 0],
    ] as const) {
      const other = await found(samples.map((v) => gain * v + offset));
      expect([other.delay.samples, other.embeddingDimension, other.theilerWindow.samples]).toEqual([
        plain.delay.samples,
        plain.embeddingDimension,
        plain.theilerWindow.samples,
      ]);
    }
  });

  it('of the time unit: times scale', async () => {
    const samples = lorenz(0.05, 1500);
    const a = (await run(samples, {}, 1)) as Reconstruction;
    const b = (await run(samples, {}, 0.05)) as Reconstruction;
    expect(b.delay.time).toBeCloseTo(0.05 * a.delay.time, 12);
    expect(b.theilerWindow.time).toBeCloseTo(0.05 * a.theilerWindow.time, 12);
  });
});

describe('noise, gaps, channels', () => {
  it('copes with 20 % noise', async () => {
    const r = await found(noisy(rossler(0.2, 5000), 0.2));
    expect(r.embeddingDimension).toBeGreaterThanOrEqual(3);
    expect(least(r)).toBeLessThan(0.4);
  });

  it('gaps: as without them, on what is left', async () => {
    const samples = lorenz(0.05, 5000);
    const plain = await found(samples);
    for (let i = 300; i < 5000; i += 500) samples.fill(Number.NaN, i, i + 7);
    const r = await found(samples);
    expect(r.embeddingDimension).toBe(plain.embeddingDimension);
    expect(Math.abs(r.delay.samples - plain.delay.samples)).toBeLessThanOrEqual(1);
    expect(r.vectors).toBe(5000 - 10 * 7 - 11 * (r.delaysPerChannel - 1) * r.delay.samples);
  });

  it('nothing to forecast a correlation time ahead: a shorter lead is compared', async () => {
    const r = await found(autoregression(1500, 0.9));
    expect(r.correlationTime.samples).toBeGreaterThan(7);
    // exact: of a first-order autoregression φ^2h of the variance can be forecast h ahead. At the correlation
    // time that is e^-2, within the scatter of local fits; at a quarter of it (3 samples) the error is 0.685.
    expect(Math.abs(least(r) - Math.sqrt(1 - 0.9 ** 6))).toBeLessThan(0.1);
  });

  it('several channels: delays per channel', async () => {
    const states = flow(lorenzField(), [1, 1, 20], 0.05, 3000);
    const channels = [0, 1, 2].map((c) => Float64Array.from(states, (s) => s[c]!));
    const r = await found(channels);
    expect(r.embeddingDimension).toBe(3 * r.delaysPerChannel);
    // The full state needs no delays.
    expect(r.delaysPerChannel).toBe(1);
    expect(least(r)).toBeLessThan(0.05);
    const one = await found(channels[0]!);
    expect(one.delaysPerChannel).toBeGreaterThan(1);
  });
});

describe('options', () => {
  it('given delay, dimension and window are kept', async () => {
    const r = await found(lorenz(0.05, 2000), { delay: 4, embeddingDimension: 5, theilerWindow: 40 });
    expect([r.delay.samples, r.embeddingDimension, r.theilerWindow.samples]).toEqual([4, 5, 40]);
    expect([r.delay.method, r.theilerWindow.method]).toEqual(['given', 'given']);
    expect(r.curves.candidates).toHaveLength(1);
  });

  it('a window below (m − 1)·delay is raised', async () => {
    const r = await found(lorenz(0.05, 2000), { delay: 4, embeddingDimension: 5, theilerWindow: 3 });
    expect(r.theilerWindow.samples).toBe(16);
    expect(r.theilerWindow.method).toMatch(/raised/);
  });

  it('dynamics: map takes every sample as an iterate', async () => {
    const r = await found(lorenz(0.2, 2000), { dynamics: 'map' });
    expect([r.dynamics, r.delay.samples]).toEqual(['map', 1]);
  });
});

describe('refusals', () => {
  const refused = async (samples: Recording['samples'], options = {}) =>
    (await run(samples, options)) as Refusal;
  it('constant', async () =>
    expect(await refused(new Float64Array(1000).fill(3))).toMatchObject({ ok: false, code: 'CONSTANT' }));
  it('stuck', async () => expect((await refused(white(3000).fill(1, 500, 900))).code).toBe('STUCK'));
  it('clipped', async () =>
    expect((await refused(white(3000).map((v) => Math.min(1, v)))).code).toBe('SATURATED'));
  it('short, with the number needed', async () => {
    const answer = await refused(white(150));
    expect(answer.code).toBe('TOO_SHORT');
    expect(answer.why).toMatch(/150 samples; at least 200/);
    // 200 samples leave fewer than 200 vectors with a target.
    const limit = await refused(white(200));
    expect(limit).toMatchObject({ code: 'TOO_SHORT', parameters: { vectors: 199, needed: 201 } });
    expect('ok' in (await run(white(201)))).toBe(false);
  });
  it('cut to pieces by gaps', async () => {
    const samples = lorenz(0.05, 3000);
    for (let i = 0; i < 3000; i += 4) samples[i] = Number.NaN;
    const answer = await refused(samples);
    expect(answer.code).toBe('TOO_SHORT');
    expect(answer.why).toMatch(/unbroken stretches/);
  });
  it('a shape the record has no room for', async () => {
    const answer = await refused(white(400), { delay: 30, embeddingDimension: 10 });
    expect(answer.code).toBe('TOO_SHORT');
    expect(answer.remedy).toMatch(/shorter delay/);
  });
});
