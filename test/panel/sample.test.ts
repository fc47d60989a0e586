import { beforeAll, describe, expect, it } from 'vitest';
import type { Compute } from '../../src/base/compute.ts';
import { openCompute } from '../geometry/compute.ts';
import { CHAOS, NOISES, REGULAR } from './generators.ts';
import { callOf } from './tally.ts';

/** Samples of a record here: the panel proper (`npm run panel`) also has other lengths and seeds. */
const SAMPLES = 2000;

let compute: Compute;
beforeAll(async () => {
  compute = await openCompute();
});

/** Every third generator, so that the normal tests stay short. */
const some = <T>(list: readonly T[]) => list.filter((_, i) => i % 3 === 0);

describe('one record of every third generator', () => {
  it('never calls noise or regular motion chaotic', async () => {
    const calls = [];
    for (const generator of [...some(NOISES), ...some(REGULAR)])
      calls.push(await callOf(generator, SAMPLES, 1, compute));
    expect(calls.filter(({ call }) => call === 'chaotic')).toEqual([]);
  });

  it('finds most of clean chaos and calls none of it regular or noise', async () => {
    const calls = [];
    for (const generator of some(CHAOS)) calls.push(await callOf(generator, SAMPLES, 1, compute));
    expect(calls.filter(({ verdict }) => verdict === 'wrong')).toEqual([]);
    expect(calls.filter(({ verdict }) => verdict === 'right').length).toBeGreaterThanOrEqual(3);
  });
});
