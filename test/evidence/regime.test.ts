import { beforeAll, describe, expect, it } from 'vitest';
import type { Compute } from '../../src/base/compute.ts';
import { openKernels } from '../../src/core/open.ts';
import {
  CHAOS,
  DISTORTED,
  type Generator,
  NOISES,
  NOISY_CYCLES,
  OTHERS,
  REGULAR,
} from '../panel/generators.ts';
import { withNoise } from '../panel/systems.ts';
import { inlineCompute, regimeOf } from './helpers.ts';

/**
 * A stratified sample of the panel: every second generator once, at a length and seed that change from one to the
 * next. What is right for each is in the truth table of `generators.ts`; `inconclusive` is never wrong.
 */
let compute: Compute;
beforeAll(async () => {
  compute = inlineCompute(await openKernels());
});

const everySecond = <T>(list: readonly T[], first = 0) => list.filter((_, i) => i % 2 === first);
const LENGTHS = [800, 1500, 2500];

async function calls(generators: readonly Generator[], noise = 0, seed = 500) {
  const results: { name: string; call: string; right: boolean }[] = [];
  for (const [i, generator] of generators.entries()) {
    const values = withNoise(generator.make, noise)(LENGTHS[i % LENGTHS.length]!, seed + i);
    const regime = await regimeOf(values, 1 + i, compute);
    const call = regime?.call ?? 'inconclusive';
    results.push({
      name: generator.name,
      call,
      right: call === 'inconclusive' || generator.right.includes(call),
    });
  }
  return results;
}
const wrong = (results: Awaited<ReturnType<typeof calls>>) =>
  results.filter((r) => !r.right).map((r) => `${r.name}: ${r.call}`);
const found = (results: Awaited<ReturnType<typeof calls>>) =>
  results.filter((r) => r.call !== 'inconclusive').length / results.length;

describe('regime call', () => {
  it('never takes noise for anything else', async () => {
    const results = await calls(everySecond([...NOISES, ...DISTORTED]));
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
    const results = await calls(
      NOISES.filter((g) => plain.includes(g.name)),
      0,
      600,
    );
    expect(wrong(results)).toEqual([]);
    // Each of three tests at 5 % may speak against, and 800 samples may be too few to judge stationarity.
    expect(found(results)).toBeGreaterThan(0.5);
  }, 60_000);

  it('never takes a noisy cycle, a drift, a switch or strange but not chaotic motion for chaos', async () => {
    expect(wrong(await calls(everySecond([...NOISY_CYCLES, ...OTHERS], 0)))).toEqual([]);
  }, 60_000);

  it('tells periodic from quasiperiodic', async () => {
    const results = await calls(everySecond(REGULAR, 1));
    expect(wrong(results)).toEqual([]);
    expect(found(results)).toBeGreaterThan(0.6);
  }, 60_000);

  it('finds chaos, clean and with 5 % noise', async () => {
    const maps = CHAOS.slice(0, 3);
    const flows = ['Lorenz', 'Rössler', 'Mackey–Glass 17', 'jerk'].map(
      (name) => CHAOS.find((g) => g.name === name)!,
    );
    for (const noise of [0, 0.05]) {
      const results = await calls([...maps, ...flows], noise);
      expect(wrong(results)).toEqual([]);
      // Every other record here is shorter than the 5,000 samples for which 95 % are asked.
      expect(found(results)).toBeGreaterThanOrEqual(noise === 0 ? 0.85 : 0.6);
    }
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
