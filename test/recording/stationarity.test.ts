import { beforeAll, describe, expect, it } from 'vitest';
import { finding } from '../../src/base/answer.ts';
import type { Compute } from '../../src/base/compute.ts';
import { openKernels } from '../../src/core/open.ts';
import { prepareRecording } from '../../src/recording/prepare.ts';
import { assessStationarity } from '../../src/recording/stationarity.ts';
import { summariseRecord } from '../../src/recording/summary.ts';
import { autoregression, henon, inline, joined, lorenz, sine, white } from '../reconstruct/records.ts';

let compute: Compute;
beforeAll(async () => {
  compute = inline(await openKernels({ backend: 'js' }));
});
/** A state space as a reconstruction would have it: delay, coordinates, window, correlation time. */
type Shape = readonly [number, number, number, number];
const FLOW: Shape = [3, 3, 8, 6];
const MAP: Shape = [1, 2, 2, 1];
const assess = (samples: Float64Array, [delay, m, window, correlation]: Shape, seed = 1) =>
  assessStationarity(
    prepareRecording({ samples, interval: 1 }),
    {
      delay: { samples: delay, time: delay, method: '' },
      delaysPerChannel: m,
      theilerWindow: { samples: window, time: window, method: '' },
      correlationTime: { samples: correlation, time: correlation },
    },
    { seed },
    compute,
  );

describe('is not called drifting', () => {
  it('a chaotic Lorenz record', async () => {
    const s = await assess(lorenz(0.05, 4000), FLOW);
    expect(s.verdict).toBe('stationary');
    expect(s.crossErrors).toHaveLength(16);
    expect([0, 5, 10, 15].map((i) => s.crossErrors[i])).toEqual([1, 1, 1, 1]);
  });
  it('a Hénon record', async () => expect((await assess(henon(2000), MAP)).verdict).toBe('stationary'));
  it.each([20.01, 25, 50.9, 61.8])('a sine of period %d', async (period) => {
    expect((await assess(sine(5000, period), [Math.round(period / 4), 2, 14, 10])).verdict).toBe(
      'stationary',
    );
  });
  it('two incommensurate tones', async () => {
    const tones = sine(6000, 50.9).map((v, i) => v + Math.sin(i * 0.1997));
    expect((await assess(tones, [8, 4, 24, 8])).verdict).toBe('stationary');
  });

  it('noise, at more than its level: 1 % of records', async () => {
    // Of 60 records at most 3 (probability of more at 1 %: 0.3 %).
    let drifting = 0;
    for (let seed = 1; seed <= 30; seed++) {
      if ((await assess(white(1500, seed), MAP, seed)).verdict === 'drifting') drifting++;
      if ((await assess(autoregression(3000, 0.9, seed), [5, 2, 20, 10], seed)).verdict === 'drifting')
        drifting++;
    }
    expect(drifting).toBeLessThanOrEqual(3);
  });
});

describe('is called drifting', () => {
  it('a linear trend in noise', async () => {
    const s = await assess(
      white(4000).map((v, i) => v + i / 4000),
      MAP,
    );
    expect(s.verdict).toBe('drifting');
    expect(s.meanPValue).toBe(0.001);
    expect(s.means[3]! - s.means[0]!).toBeCloseTo(0.75, 1);
    expect(s.text).toMatch(/mean moves/);
  });
  it('a trend under a sine', async () => {
    expect(
      (
        await assess(
          sine(5000, 50.9).map((v, i) => v + i / 2500),
          [12, 3, 30, 12],
        )
      ).verdict,
    ).toBe('drifting');
  });
  it('a growing amplitude', async () => {
    const s = await assess(
      white(4000).map((v, i) => v * (1 + i / 4000)),
      MAP,
    );
    expect(s.verdict).toBe('drifting');
    expect(s.text).toMatch(/spread changes/);
  });
  it('a parameter of the Lorenz system that switches halfway', async () => {
    const s = await assess(joined(lorenz(0.05, 3000), lorenz(0.05, 3000, 35)), FLOW);
    expect(s.verdict).toBe('drifting');
    expect(s.crossPValue).toBe(0.001);
  });
  it('a small switch of the Hénon map, seen by the forecasts', async () => {
    const s = await assess(joined(henon(1500), henon(1500, 1.35)), MAP);
    expect(s.verdict).toBe('drifting');
    expect(s.text).toMatch(/forecasts made from one part miss in another/);
    expect(s.crossErrors[2]).toBeGreaterThan(1.5); // part 3 from part 1
  });
  it('a correlation that changes at equal mean and spread', async () => {
    const half = (phi: number, seed: number) =>
      autoregression(2500, phi, seed).map((v) => v * Math.sqrt(1 - phi * phi));
    const s = await assess(joined(half(0.5, 1), half(-0.5, 2)), MAP);
    expect(s.verdict).toBe('drifting');
    expect(s.meanPValue).toBeGreaterThan(0.01);
    expect(s.spreadPValue).toBeGreaterThan(0.01);
  });
});

describe('is left undecided', () => {
  it('a record short for its slowest correlation, with the length that would do', async () => {
    const s = await assess(autoregression(5000, 0.998), [250, 2, 500, 500]);
    expect(s.verdict).toBe('undecided');
    expect(s.text).toMatch(/about \d+ samples would do/);
  });
  it('a short record', async () => expect((await assess(white(300), MAP)).verdict).toBe('undecided'));
  it('a beat as long as a third of the record', async () => {
    const beat = Float64Array.from(
      { length: 9000 },
      (_, i) => Math.sin(i * 0.3) + 0.7 * Math.sin(i * 0.3021),
    );
    expect((await assess(beat, [5, 4, 15, 4])).verdict).not.toBe('drifting');
  });
});

it('gaps are borne', async () => {
  const samples = lorenz(0.05, 4000);
  for (let i = 100; i < 4000; i += 400) samples.fill(Number.NaN, i, i + 11);
  expect((await assess(samples, FLOW)).verdict).toBe('stationary');
});

it('the same seed gives the same bits', async () => {
  const samples = lorenz(0.05, 2500);
  expect(await assess(samples, FLOW, 3)).toEqual(await assess(samples, FLOW, 3));
});

describe('summary', () => {
  it('says what a reader needs about the record', async () => {
    const samples = white(2000).map((v) => 20 + Math.round(v / 0.1) * 0.1);
    samples.fill(Number.NaN, 0, 5);
    samples.fill(Number.NaN, 700, 702);
    const record = prepareRecording({ samples, interval: 0.5, unit: 'K', sensorNoise: 0.02 });
    const noise = finding({ value: 0.03, low: 0.02, high: 0.04, level: 0.9, unit: 'K', method: 'm' });
    const summary = summariseRecord(record, await assess(samples, MAP), noise);
    expect(summary.gaps).toEqual({ missing: 7, runs: 2 });
    expect(summary.sensorNoise).toMatchObject({ value: 0.02, method: 'given by the caller' });
    // exact: IEEE Std 1241, step / √12, and log2(std·√12 / step) bits.
    expect(summary.resolution.quantisationNoise).toBeCloseTo(0.1 / Math.sqrt(12), 10);
    expect(summary.resolution.effectiveBits).toBeCloseTo(
      Math.log2((record.stds[0]! * Math.sqrt(12)) / 0.1),
      8,
    );
    expect(summary.resolution.source).toBe('found');
    expect(summary.unit).toBe('K');
    const plain = prepareRecording({ samples, interval: 0.5, unit: 'K' });
    expect(summariseRecord(plain, summary.stationarity, noise).sensorNoise).toBe(noise);
  });
});
