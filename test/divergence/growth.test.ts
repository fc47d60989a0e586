import { describe, expect, it } from 'vitest';
import { createRandom } from '../../src/base/random.ts';
import { BLOCKS } from '../../src/divergence/curve.ts';
import { growthOf } from '../../src/divergence/growth.ts';
import { MeanCurve } from '../../src/divergence/mean-curve.ts';

/** A curve with the same shape in every block and a little independent noise. */
function curveOf(value: (s: number) => number, steps: number, noise = 0.02, seed = 1): MeanCurve {
  const random = createRandom(seed);
  const logSums = new Float64Array(BLOCKS * (steps + 1));
  const counts = new Float64Array(BLOCKS * (steps + 1)).fill(100);
  for (let b = 0; b < BLOCKS; b++)
    for (let s = 0; s <= steps; s++)
      logSums[b * (steps + 1) + s] = 100 * (value(s) + noise * random.normal());
  return new MeanCurve({ logSums, counts }, steps);
}

const flow = { earliest: 5, floor: Number.NEGATIVE_INFINITY, dynamics: 'flow', origin: 4 } as const;

describe('growth of a divergence curve', () => {
  it('exponential growth to a level: its rate, below the level', () => {
    const growth = growthOf(
      curveOf((s) => Math.min(0, -5 + 0.05 * s), 200),
      flow,
    );
    expect(growth.best!.slope).toBeCloseTo(0.05, 3);
    expect(growth.best!.folds).toBeGreaterThanOrEqual(2);
    expect(growth.best!.to).toBeLessThanOrEqual(100);
    expect(growth.best!.from).toBeGreaterThanOrEqual(5);
  });

  it('diffusion, power laws and relaxation are not exponential, however clean', () => {
    const shapes: [string, (s: number) => number][] = [
      ['square root', (s) => -4 + 0.5 * Math.log(1 + s)],
      ['linear', (s) => -5 + Math.log(1 + s)],
      ['square', (s) => -9 + 2 * Math.log(5 + s)],
      ['relaxation', (s) => 0.5 * Math.log(1e-4 + 1 - Math.exp(-s / 60))],
      ['flat', () => -3],
      ['oscillating', (s) => -3 + 0.3 * Math.sin(s / 5)],
    ];
    for (const [name, shape] of shapes)
      for (const noise of [0, 0.02, 0.1])
        expect(growthOf(curveOf(shape, 300, noise), flow).best, `${name}, noise ${noise}`).toBeNull();
  });

  it('starts above the floor and asks for two e-folds there', () => {
    const shape = (s: number) => Math.min(0, -5 + 0.05 * s);
    const high = growthOf(curveOf(shape, 200), { ...flow, floor: -3.5 });
    expect(high.start).toBeGreaterThanOrEqual(29);
    expect(high.best!.from).toBeGreaterThanOrEqual(29);
    expect(growthOf(curveOf(shape, 200), { ...flow, floor: -2 }).best).toBeNull();
  });

  it('a slope of least squares and its jackknife error (exact: mean of blocks)', () => {
    const steps = 10;
    const logSums = new Float64Array(BLOCKS * (steps + 1));
    const counts = new Float64Array(BLOCKS * (steps + 1)).fill(1);
    for (let b = 0; b < BLOCKS; b++)
      for (let s = 0; s <= steps; s++) logSums[b * (steps + 1) + s] = (1 + 0.1 * b) * s - 3;
    const curve = new MeanCurve({ logSums, counts }, steps);
    const rates = Array.from({ length: BLOCKS }, (_, b) => 1 + 0.1 * b);
    const mean = rates.reduce((a, b) => a + b) / BLOCKS;
    expect(curve.slope(0, 2, 8)).toBeCloseTo(mean, 12);
    const variance = rates.reduce((a, b) => a + (b - mean) ** 2, 0) / (BLOCKS - 1);
    expect(curve.standardError((v) => curve.slope(v, 2, 8))).toBeCloseTo(Math.sqrt(variance / BLOCKS), 12);
  });
});
