import { beforeAll, describe, expect, it } from 'vitest';
import { runToEnd } from '../../src/base/compute.ts';
import type { Kernels } from '../../src/base/kernels.ts';
import { openKernels } from '../../src/core/open.ts';
import { localExponentTask } from '../../src/evidence/local-exponent.ts';
import { autoregressive, resonance, telegraph, white } from '../panel/processes.ts';
import { flow, lorenzField, map, vanDerPolField } from '../panel/systems.ts';
import { mean } from './helpers.ts';

let kernels: Kernels;
beforeAll(async () => {
  kernels = await openKernels();
});

function exponent(series: Float64Array, delay: number, dimension: number, window = 0): number {
  const centre = mean(Array.from(series));
  const std = Math.sqrt(mean(Array.from(series, (v) => (v - centre) ** 2)));
  const result = runToEnd(localExponentTask, kernels, {
    series: series.map((v) => (v - centre) / std),
    delay,
    dimension,
    window,
  });
  return mean(result!.blocks);
}

describe('exponent of locally fitted maps', () => {
  it('is that of the logistic map (exact: ln 2), Hénon map and Lorenz system (published: Sprott 2003)', () => {
    expect(
      Math.abs(exponent(map(([x]) => [4 * x! * (1 - x!)], [0.3])(3000, 1), 1, 1) - Math.LN2),
    ).toBeLessThan(0.03);
    const henon = map(([x, y]) => [1 - 1.4 * x! * x! + y!, 0.3 * x!], [0.1, 0.1]);
    expect(Math.abs(exponent(henon(4000, 1), 1, 2) - 0.4192)).toBeLessThan(0.04);
    const lorenz = flow(lorenzField(), [1, 1, 20], 0.05)(8000, 1);
    // Per time unit; finite neighbourhoods and 20 blocks leave about 10 %.
    expect(Math.abs(exponent(lorenz, 2, 3, 10) / 0.05 - 0.9056)).toBeLessThan(0.15);
  });

  it('is ln |largest root| for linear processes (exact), never positive', () => {
    expect(exponent(white(2000, 1), 1, 2)).toBeLessThan(-1);
    expect(exponent(autoregressive([0.9])(4000, 1), 1, 1)).toBeLessThan(-0.05);
    const narrow = exponent(resonance(0.97, 20)(6000, 1), 1, 2, 20);
    expect(narrow).toBeLessThan(0);
    expect(Math.abs(narrow - Math.log(0.97))).toBeLessThan(0.02);
  });

  it('is zero for a limit cycle (exact)', () => {
    expect(Math.abs(exponent(flow(vanDerPolField(1), [2, 0], 0.3)(3000, 1), 5, 2, 10))).toBeLessThan(0.003);
  });

  it('is negative for lagged random switching, whose neighbours part at once and by chance', () => {
    expect(exponent(telegraph(25, 6, 0)(4000, 1), 3, 3, 30)).toBeLessThan(-0.1);
  });
});
