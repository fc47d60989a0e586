import { describe, expect, it } from 'vitest';
import {
  absoluteQuantiles,
  compareForecasts,
  rmsByLead,
  saturationColumn,
  score,
} from '../../src/forecast/skill.ts';
import { white } from './helpers.ts';

const N = 400;
const LEADS = 4;
const at = Int32Array.of(1, 2, 3, 4);
const errorsOf = (seed: number, scale: readonly number[]) =>
  white(N * LEADS, seed).map((x, i) => x * scale[i % LEADS]!);
const one = new Float64Array(LEADS).fill(1);

describe('skill', () => {
  it('root mean squares and quantiles by lead (exact)', () => {
    const errors = Float64Array.of(3, 1, -4, 1, 0, -2);
    expect([...rmsByLead(errors, 2)]).toEqual([Math.sqrt(25 / 3), Math.sqrt(6 / 3)]);
    expect(absoluteQuantiles(errors, 2, 0, [0.5, 0.9])).toEqual([3, 4]);
  });

  it('a forecast that is better at every lead beats the other, and not the reverse', () => {
    const good = errorsOf(1, [0.2, 0.3, 0.4, 0.5]);
    const bad = errorsOf(2, [0.4, 0.6, 0.8, 1]);
    expect(compareForecasts(good, bad, LEADS, at, one, 20)).toBeLessThan(-2.3);
    expect(compareForecasts(bad, good, LEADS, at, one, 20)).toBeGreaterThan(2.3);
    expect(score(good, LEADS)).toBeLessThan(score(bad, LEADS));
  });

  it('two forecasts of equal quality rarely differ: at most 2.5 % of comparisons either way', () => {
    let wrong = 0;
    for (let r = 0; r < 200; r++) {
      const t = compareForecasts(
        errorsOf(10 + 2 * r, [0.5, 0.5, 0.5, 0.5]),
        errorsOf(11 + 2 * r, [0.5, 0.5, 0.5, 0.5]),
        LEADS,
        at,
        one,
        10,
      );
      if (t < -2.3) wrong++;
    }
    // Expected 5 (2.35 % of 200); 12 is three binomial standard deviations above.
    expect(wrong).toBeLessThanOrEqual(12);
  });

  it('does not compare where neither is better than the mean', () => {
    expect(
      compareForecasts(errorsOf(1, [1, 1, 1, 1]), errorsOf(2, [1.4, 1.4, 1.4, 1.4]), LEADS, at, one, 20),
    ).toBe(0);
  });

  it('finds where errors reach those of the mean', () => {
    const growing = errorsOf(3, [0.1, 0.3, 1.2, 1.4]);
    const mean = errorsOf(4, [1, 1, 1, 1]);
    expect(saturationColumn(growing, mean, LEADS, 1)).toBe(2);
    expect(
      saturationColumn(
        growing.map((x) => x / 10),
        mean,
        LEADS,
        1,
      ),
    ).toBe(-1);
  });
});
