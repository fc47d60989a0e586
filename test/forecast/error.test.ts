import { beforeAll, describe, expect, it } from 'vitest';
import { runToEnd } from '../../src/base/compute.ts';
import type { Kernels } from '../../src/base/kernels.ts';
import { openKernels } from '../../src/core/open.ts';
import { forecastErrorTask } from '../../src/forecast/error.ts';
import { henon, roessler, white } from './helpers.ts';

let kernels: Kernels;
beforeAll(async () => {
  kernels = await openKernels({ backend: 'js' });
});

describe('forecast.error', () => {
  it('is about √(1 + 1/k) on white noise: the mean of k unrelated values as forecast (exact)', () => {
    const input = { series: white(6000, 1), delay: 1, dimension: 3, window: 5, lead: 1, neighbours: 8 };
    const { error, origins } = runToEnd(forecastErrorTask, kernels, input);
    expect(origins).toBe(2000);
    // Standard error of an rms over 2,000 origins: 1/√4000 = 1.6 %; three of them.
    expect(Math.abs(error! / Math.sqrt(1 + 1 / 8) - 1)).toBeLessThan(0.05);
  });

  it('is small on a deterministic record and grows with the lead', () => {
    const input = { series: henon(3000), delay: 1, dimension: 2, window: 5 };
    const one = runToEnd(forecastErrorTask, kernels, { ...input, lead: 1 }).error!;
    const eight = runToEnd(forecastErrorTask, kernels, { ...input, lead: 8 }).error!;
    expect(one).toBeLessThan(0.05);
    expect(eight).toBeGreaterThan(5 * one);
  });

  it('bridges no gap, and says null where nothing can be forecast', () => {
    const series = roessler(1000);
    const present = new Uint8Array(1000).fill(1);
    const clean = runToEnd(forecastErrorTask, kernels, {
      series,
      delay: 5,
      dimension: 3,
      window: 20,
      lead: 3,
    });
    present.fill(0, 400, 420);
    const holed = series.slice().fill(1e6, 400, 420);
    const gap = runToEnd(forecastErrorTask, kernels, {
      series: holed,
      present,
      delay: 5,
      dimension: 3,
      window: 20,
      lead: 3,
    });
    expect(gap.error!).toBeLessThan(2 * clean.error!);
    expect(
      runToEnd(forecastErrorTask, kernels, {
        series: series.slice(0, 12),
        delay: 5,
        dimension: 3,
        window: 5,
        lead: 3,
      }),
    ).toEqual({ error: null, origins: 0 });
    expect(
      runToEnd(forecastErrorTask, kernels, {
        series: new Float64Array(500).fill(2),
        delay: 1,
        dimension: 2,
        window: 5,
        lead: 1,
      }).error,
    ).toBeNull();
  });
});
