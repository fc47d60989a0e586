import { beforeAll, describe, expect, it } from 'vitest';
import { runToEnd } from '../../src/base/compute.ts';
import type { Kernels } from '../../src/base/kernels.ts';
import { openKernels } from '../../src/core/open.ts';
import { baseFrequencies } from '../../src/evidence/base-frequencies.ts';
import { spectralLinesTask } from '../../src/evidence/spectral-lines.ts';
import { powerLaw, resonance, white } from '../panel/processes.ts';
import { flow, lorenzField, tones, vanDerPolField, withNoise } from '../panel/systems.ts';

let kernels: Kernels;
beforeAll(async () => {
  kernels = await openKernels();
});
const linesOf = (values: Float64Array) => runToEnd(spectralLinesTask, kernels, { values });

describe('sharp spectral lines', () => {
  it('of two tones: frequency to a hundredth of a bin, share of the variance (exact)', () => {
    // Shares a²/2 over their sum: 1 : 0.49.
    const { lines, share } = linesOf(
      tones([
        [23.7, 1],
        [38.3, 0.7],
      ])(3000, 4),
    );
    expect(lines).toHaveLength(2);
    expect(Math.abs(lines[0]!.frequency - 1 / 23.7) * 3000).toBeLessThan(0.01);
    expect(Math.abs(lines[1]!.frequency - 1 / 38.3) * 3000).toBeLessThan(0.01);
    expect(lines[0]!.share).toBeCloseTo(1 / 1.49, 2);
    expect(share).toBeGreaterThan(0.9999);
  });

  it('of a tone in noise: the share that is not noise (exact: 1 / (1 + 0.3²))', () => {
    const { lines, share } = linesOf(withNoise(tones([[23.7, 1]]), 0.3)(4000, 4));
    expect(lines).toHaveLength(1);
    expect(Math.abs(share - 1 / 1.09)).toBeLessThan(0.01);
  });

  it('of an alternation: half a cycle per sample', () => {
    const { lines, share } = linesOf(Float64Array.from({ length: 1001 }, (_, i) => (i % 2 ? 1 : -1)));
    expect(lines.map((line) => line.frequency)).toEqual([0.5]);
    expect(share).toBeGreaterThan(0.9999);
  });

  it('are not seen in noise, resonances or Lorenz chaos', () => {
    for (const [make, count] of [
      [white, 40],
      [resonance(0.97, 20), 20],
      [powerLaw(0.5), 6],
    ] as const) {
      let found = 0;
      for (let seed = 0; seed < count; seed++) found += linesOf(make(1500, seed)).lines.length;
      // A false line in 1 of 1,000 noise records is the level set.
      expect(found).toBeLessThanOrEqual(1);
    }
    expect(linesOf(flow(lorenzField(), [1, 1, 20], 0.06)(4000, 1)).share).toBeLessThan(0.1);
  });
});

describe('base frequencies', () => {
  const bases = (values: Float64Array) => {
    const { lines, share } = linesOf(values);
    return baseFrequencies(lines, values.length, 1 - share).bases;
  };

  it('are one for a limit cycle and for a period of two turns', () => {
    expect(bases(flow(vanDerPolField(3), [2, 0], 0.3)(3000, 1))).toHaveLength(1);
    const doubled = bases(
      tones([
        [20, 1],
        [40, 0.3],
        [60.0, 0.1],
        [120, 0.1],
      ])(3000, 2),
    );
    expect(doubled).toHaveLength(1);
    expect(doubled[0]).toBeCloseTo(1 / 120, 5);
    // Weak harmonics in noise have frequencies with larger errors, which must not count as further bases.
    for (let seed = 0; seed < 10; seed++) {
      const noisy = withNoise(flow(vanDerPolField(5), [2, 0], 0.4), 0.05)(1500 + 100 * seed, seed);
      expect(bases(noisy)).toHaveLength(1);
    }
  });

  it('are two or three for incommensurate tones, also with their sums', () => {
    const golden = (1 + Math.sqrt(5)) / 2;
    const [f, g] = [1 / 23.7, 1 / (23.7 * golden)];
    expect(
      bases(
        tones([
          [1 / f, 1],
          [1 / g, 0.7],
        ])(3000, 3),
      ),
    ).toHaveLength(2);
    expect(
      bases(
        tones([
          [1 / f, 1],
          [1 / g, 0.7],
          [1 / (f + g), 0.3],
          [1 / (2 * f - g), 0.2],
        ])(3000, 3),
      ),
    ).toHaveLength(2);
    expect(
      bases(
        tones([
          [13.7, 1],
          [13.7 * golden, 0.7],
          [13.7 * Math.SQRT2 * 2, 0.6],
        ])(3000, 3),
      ),
    ).toHaveLength(3);
    // A tone modulated by another: 1/17.3, and with the other added and taken away (once fooled by a folded fit).
    const slow = 1 / (17.3 * 2 * golden);
    const modulated = tones([
      [17.3, 1],
      [1 / (1 / 17.3 + slow), 0.25],
      [1 / (1 / 17.3 - slow), 0.25],
      [17.3 / 2, 0.1],
    ]);
    for (const n of [800, 1500, 2500]) expect(bases(modulated(n, 5))).toHaveLength(2);
  });
});
