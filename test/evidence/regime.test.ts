import { beforeAll, describe, expect, it } from 'vitest';
import type { Compute } from '../../src/base/compute.ts';
import { openKernels } from '../../src/core/open.ts';
import { CHAOS, DISTORTED, NOISES, NOISY_CYCLES, OTHERS, REGULAR } from '../panel/generators.ts';
import { inlineCompute, regimeOf } from './helpers.ts';
import { callEach, everySecond, found, wrong } from './panel-calls.ts';

/**
 * A stratified sample of the panel: every second generator once, at a length and seed that change from one to the
 * next. What is right for each is in the truth table of `generators.ts`; `inconclusive` is never wrong.
 */
let compute: Compute;
beforeAll(async () => {
  compute = inlineCompute(await openKernels());
});

describe('regime call', () => {
  it('never takes noise for anything else', async () => {
    const results = await callEach(compute, everySecond([...NOISES, ...DISTORTED]), 500);
    expect(wrong(results)).toEqual([]);
  }, 60_000);

  it('finds plain linear noise', async () => {
    const plain = [
      'white',
      'AR(1) 0.5',
      'AR(1) 0.9',
      'resonance 0.9',
      'resonance 0.97',
      'cubed AR',
      'smoothed',
    ];
    const results = await callEach(
      compute,
      NOISES.filter((g) => plain.includes(g.name)),
      600,
    );
    expect(wrong(results)).toEqual([]);
    // Each of three tests at 5 % may speak against, and 800 samples may be too few to judge stationarity.
    expect(found(results)).toBeGreaterThan(0.5);
  }, 60_000);

  it('never takes a noisy cycle, a drift, a switch or strange but not chaotic motion for chaos', async () => {
    expect(wrong(await callEach(compute, everySecond([...NOISY_CYCLES, ...OTHERS]), 500))).toEqual([]);
  }, 60_000);

  it('tells periodic from quasiperiodic', async () => {
    const results = await callEach(compute, everySecond(REGULAR, 1), 500);
    expect(wrong(results)).toEqual([]);
    expect(found(results)).toBeGreaterThan(0.6);
  }, 60_000);
});

describe('the reasons', () => {
  it('carry a number, a direction and a text each; the verdict stands first', async () => {
    const regime = (await regimeOf(CHAOS[0]!.make(1200, 3), 1, compute))!;
    expect(regime.call).toBe('chaotic');
    expect(regime.confidence).toBeGreaterThan(0.5);
    expect(regime.confidence).toBeLessThan(1);
    expect(regime.reasons[0]!.speaksFor).toBe('chaotic');
    const codes = regime.reasons.map((r) => r.code);
    for (const code of [
      'LINE_SPECTRUM',
      'ZERO_ONE',
      'LINEAR_NULL_REJECTED',
      'DIFFERENCES_GROW',
      'GROWTH_BEYOND_NOISE',
      'SKILL_FALLS',
    ])
      expect(codes).toContain(code);
    for (const reason of regime.reasons) {
      expect(reason.text).not.toMatch(/NaN|Infinity|undefined/);
      expect(reason.value === null || Number.isFinite(reason.value)).toBe(true);
    }
  });
});

describe('any record', () => {
  const henon = CHAOS.find((g) => g.name === 'Hénon')!.make(1500, 5);

  it('with gaps, with a second channel, in other units', async () => {
    const gaps = henon.slice();
    for (const t of [20, 21, 700, 1400]) gaps[t] = Number.NaN;
    expect((await regimeOf(gaps, 1, compute))!.call).toMatch(/chaotic|inconclusive/);
    const second = henon.map((_, i) => henon[(i + 1499) % 1500]!);
    expect((await regimeOf([henon, second], 1, compute))!.call).toBe('chaotic');
    const plain = (await regimeOf(henon, 1, compute))!;
    const scaled = (await regimeOf(
      henon.map((v) => 1024 * v),
      1,
      compute,
    ))!;
    expect(scaled.call).toBe(plain.call);
    expect(scaled.confidence).toBe(plain.confidence);
  });

  it('gives the same bits on every backend', async () => {
    const reference = await regimeOf(henon, 2, compute);
    for (const backend of ['wasm-scalar', 'js'] as const) {
      const other = inlineCompute(await openKernels({ backend }));
      expect(await regimeOf(henon, 2, other)).toEqual(reference);
    }
  });

  it('too short or constant is refused or inconclusive, never a call', async () => {
    for (const values of [new Float64Array(400).fill(3), henon.slice(0, 150)])
      expect((await regimeOf(values, 1, compute))?.call ?? 'inconclusive').toBe('inconclusive');
  });
});
