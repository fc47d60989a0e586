import { beforeAll, describe, expect, it } from 'vitest';
import { runToEnd } from '../../src/base/compute.ts';
import type { Kernels } from '../../src/base/kernels.ts';
import { openKernels } from '../../src/core/open.ts';
import {
  binsFor,
  correlationTask,
  rankSymbols,
  tableInformation,
} from '../../src/reconstruct/correlation.ts';
import { decideDynamics, firstMinimum } from '../../src/reconstruct/delay.ts';
import { prepareRecording } from '../../src/recording/prepare.ts';
import { autoregression, henon, lorenz, sine, white } from './records.ts';

let kernels: Kernels;
beforeAll(async () => {
  kernels = await openKernels({ backend: 'js' });
});
function curvesOf(samples: Float64Array) {
  const record = prepareRecording({ samples, interval: 1 });
  return {
    record,
    curves: runToEnd(correlationTask, kernels, { series: record.scaled, present: record.present }),
  };
}

describe('autocorrelation', () => {
  it('equals the sum over pairs, gaps left out (brute force)', () => {
    const samples = autoregression(700, 0.8);
    for (const gap of [
      [100, 130],
      [400, 401],
      [699, 700],
    ] as const)
      samples.fill(Number.NaN, ...gap);
    const { record, curves } = curvesOf(samples);
    const product = (lag: number) => {
      let sum = 0;
      let pairs = 0;
      for (let t = 0; t + lag < 700; t++)
        if (record.present[t] && record.present[t + lag]) {
          sum += record.scaled[t]! * record.scaled[t + lag]!;
          pairs++;
        }
      return sum / pairs;
    };
    for (const lag of [0, 1, 2, 7, 33, 101, 175])
      expect(curves.autocorrelation[lag]).toBeCloseTo(product(lag) / product(0), 10);
  });

  it('of an autoregression is φ^lag (exact), also beyond one piece of the transform', () => {
    const n = 100_000;
    const { curves } = curvesOf(autoregression(n, 0.9));
    // Bartlett 1946 (J. R. Stat. Soc. Suppl. 8, 27): the standard error is below √((1 + φ²)/(1 − φ²)/n) = 0.0098.
    for (const lag of [1, 2, 5, 10, 20, 40])
      expect(Math.abs(curves.autocorrelation[lag]! - 0.9 ** lag)).toBeLessThan(4 * 0.0098);
    expect(curves.decayLag).toBe(10); // 0.9^9 = 0.387, 0.9^10 = 0.349, 1/e = 0.368
  });
});

describe('mutual information', () => {
  it('of a bivariate normal pair is −½ ln(1 − ρ²) (exact)', () => {
    const n = 60_000;
    const { curves } = curvesOf(autoregression(n, 0.7));
    const { lags, nats, errors } = curves.mutualInformation;
    for (const lag of [2, 3, 5, 8, 12]) {
      const rho = 0.7 ** lag;
      const exact = -0.5 * Math.log(1 - rho * rho);
      const at = lags.indexOf(lag);
      // Binning loses information (never adds any): with 32 bins under 1 % at these correlations.
      expect(Math.abs(nats[at]! - exact)).toBeLessThan(4 * errors[at]! + 0.01 * exact);
    }
  });

  it('of independent samples is zero within its error', () => {
    let beyond = 0;
    for (let seed = 1; seed <= 10; seed++) {
      const { nats, errors } = curvesOf(white(3000, seed)).curves.mutualInformation;
      nats.forEach((v, i) => {
        if (Math.abs(v) > 3 * errors[i]!) beyond++;
      });
    }
    expect(beyond).toBeLessThanOrEqual(3); // 160 values
  });

  it('of a table: independent 0 by hand, identical ln(bins)', () => {
    const same = Float64Array.from({ length: 16 }, (_, i) => (i % 5 === 0 ? 1000 : 0));
    // (4 cells − 4 − 4 + 1) / (2·4000) is the bias of the four cells: negative, as no cell is due to chance.
    expect(tableInformation(same, 4).information).toBeCloseTo(Math.log(4) + 3 / 8000, 12);
    const flat = new Float64Array(16).fill(1000);
    expect(tableInformation(flat, 4).information).toBeCloseTo(-9 / 32000, 12);
  });

  it('does not change under a monotone distortion of the sensor', () => {
    const samples = lorenz(0.05, 3000);
    const plain = curvesOf(samples).curves.mutualInformation;
    const bent = curvesOf(samples.map((v) => Math.exp(v / 8))).curves.mutualInformation;
    const shared = Math.min(plain.lags.length, bent.lags.length);
    expect(shared).toBeGreaterThan(10);
    for (let i = 0; i < shared; i++) expect(bent.nats[i]).toBe(plain.nats[i]);
  });
});

describe('equal-probability bins', () => {
  it('hold equal numbers of distinct values', () => {
    const series = white(1000);
    const symbols = rankSymbols(series, new Uint8Array(1000).fill(1), 10);
    const counts = new Array(10).fill(0);
    for (const s of symbols) counts[s]++;
    expect(counts).toEqual(new Array(10).fill(100));
  });

  it('never part equal values', () => {
    const series = white(1000).map((v) => Math.round(v * 2));
    const symbols = rankSymbols(series, new Uint8Array(1000).fill(1), 12);
    const of = new Map<number, number>();
    series.forEach((v, i) => {
      expect(of.get(v) ?? symbols[i]).toBe(symbols[i]);
      of.set(v, symbols[i]!);
    });
  });

  it('mark what is not used', () => {
    const used = new Uint8Array(50).fill(1);
    used[7] = 0;
    expect(rankSymbols(white(50), used, 4)[7]).toBe(255);
  });

  it('are as many as five pairs to a cell allow', () => {
    expect([50, 200, 2000, 5120, 1e6].map(binsFor)).toEqual([4, 6, 20, 32, 32]);
  });
});

describe('delay', () => {
  const curve = (nats: number[], error: number) => ({
    mutualInformation: {
      lags: Int32Array.from(nats, (_, i) => i + 1),
      nats: Float64Array.from(nats),
      errors: new Float64Array(nats.length).fill(error),
    },
  });
  it('is the first minimum that the curve leaves by more than its error', () => {
    expect(firstMinimum(curve([3, 2, 1, 2, 3], 0.1))).toBe(3);
    expect(firstMinimum(curve([3, 2, 2.2, 1, 0.5, 1.5], 0.1))).toBe(5); // the ripple at 2 is within three errors
    expect(firstMinimum(curve([3, 2, 2.4, 1, 0.5, 1.5], 0.1))).toBe(2);
    expect(firstMinimum(curve([3, 2, 1, 0.5, 0.45, 0.46], 0.1))).toBeUndefined();
  });

  it('of a sine is near a quarter of its period', () => {
    const { curves } = curvesOf(sine(6000, 61.8));
    expect(Math.abs(firstMinimum(curves)! - 61.8 / 4)).toBeLessThan(4);
  });

  it('of the Lorenz system is 0.16 to 0.2 time units', () => {
    // published: first minimum at 0.16–0.18 (16 to 18 samples of 0.01) — common practice for x(t)
    const lag = firstMinimum(curvesOf(lorenz(0.01, 20_000)).curves)!;
    expect(lag).toBeGreaterThanOrEqual(15);
    expect(lag).toBeLessThanOrEqual(20);
  });

  it('of a map is one sample: its autocorrelation is below 1/e at once', () => {
    expect(decideDynamics(curvesOf(henon(2000)).curves, 'auto')).toBe('map');
    expect(decideDynamics(curvesOf(white(2000)).curves, 'auto')).toBe('map');
    expect(decideDynamics(curvesOf(lorenz(0.05, 2000)).curves, 'auto')).toBe('flow');
    expect(decideDynamics(curvesOf(lorenz(0.05, 2000)).curves, 'map')).toBe('map');
  });
});
