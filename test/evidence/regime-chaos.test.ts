import { beforeAll, describe, expect, it } from 'vitest';
import type { Compute } from '../../src/base/compute.ts';
import { openKernels } from '../../src/core/open.ts';
import { CHAOS } from '../panel/generators.ts';
import { inlineCompute } from './helpers.ts';
import { callEach, found, wrong } from './panel-calls.ts';

let compute: Compute;
beforeAll(async () => {
  compute = inlineCompute(await openKernels());
});

const named = (...names: string[]) => names.map((name) => CHAOS.find((g) => g.name === name)!);

describe('chaos', () => {
  it('is found in clean records of 1,000 samples', async () => {
    const results = await callEach(
      compute,
      named('logistic', 'logistic 3.7', 'Hénon', 'Ikeda', 'Lorenz', 'Rössler', 'Mackey–Glass 17'),
      700,
      0,
      [1000],
    );
    expect(wrong(results)).toEqual([]);
    expect(found(results)).toBeGreaterThanOrEqual(0.85);
  }, 60_000);

  it('is found under 5 % measurement noise in 5,000 samples', async () => {
    const results = await callEach(
      compute,
      named('logistic', 'Hénon', 'Lorenz', 'Rössler c = 10', 'Mackey–Glass 23'),
      500,
      0.05,
      [5000],
    );
    expect(wrong(results)).toEqual([]);
    // One of five may go: whether the record is stationary is itself a test, at 1 %.
    expect(found(results)).toBeGreaterThanOrEqual(0.8);
  }, 60_000);
});
