import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { createRandom } from '../../src/base/random.ts';
import { bootstrapRank, conformalRank, firstExits, orderStatistic } from '../../src/forecast/exits.ts';

describe('first exits', () => {
  it('take the first lead over the tolerance, also when the path comes back', () => {
    // Rows: leaves at lead 2 and returns; never leaves; leaves at once. The tolerance itself is inside.
    const errors = Float64Array.of(0.1, -0.6, 0.1, 0.5, -0.5, 0.5, 0.7, 0, 0);
    expect([...firstExits(errors, 3, 0.5)]).toEqual([2, 4, 1]);
  });

  it('never fall when the tolerance grows', () => {
    fc.assert(
      fc.property(
        fc.array(fc.double({ min: -2, max: 2, noNaN: true }), { minLength: 12, maxLength: 12 }),
        fc.double({ min: 0, max: 2, noNaN: true }),
        fc.double({ min: 0, max: 2, noNaN: true }),
        (values, a, b) => {
          const errors = Float64Array.from(values);
          const narrow = firstExits(errors, 4, Math.min(a, b));
          const wide = firstExits(errors, 4, Math.max(a, b));
          return narrow.every((t, i) => t <= wide[i]!);
        },
      ),
    );
  });
});

describe('conformal rank', () => {
  it('is ⌊(n + 1)(1 − p)⌋ for independent origins (exact)', () => {
    expect(conformalRank(9, 9, 0.9)).toBe(1); // 10 · (1 − 0.9) is 0.9999999999999998 in doubles
    expect(conformalRank(8, 8, 0.9)).toBe(0);
    expect(conformalRank(99, 99, 0.9)).toBe(10);
    expect(conformalRank(19, 19, 0.95)).toBe(1);
    expect(conformalRank(1000, 1000, 0.5)).toBe(500);
  });

  it('promises nothing when fewer than 1 / (1 − p) − 1 origins are independent', () => {
    expect(conformalRank(1000, 8, 0.9)).toBe(0);
    expect(conformalRank(1000, 98, 0.99)).toBe(0);
    expect(conformalRank(1000, 99, 0.99)).toBe(10);
  });

  it('never leaves out more than 1 − p, and no more at a higher confidence', () => {
    fc.assert(
      fc.property(
        fc.integer({ min: 1, max: 2000 }),
        fc.integer({ min: 1, max: 2000 }),
        fc.double({ min: 0.5, max: 0.99, noNaN: true }),
        fc.double({ min: 0.5, max: 0.99, noNaN: true }),
        (n, independent, a, b) => {
          const low = conformalRank(n, independent, Math.min(a, b));
          const high = conformalRank(n, independent, Math.max(a, b));
          expect(high).toBeLessThanOrEqual(low);
          expect(low).toBeLessThanOrEqual((n + 1) * (1 - Math.min(a, b)) + 1e-6);
        },
      ),
    );
  });

  it('holds its coverage on independent draws of any distribution', () => {
    // 2,000 records of 59 exit times each with many ties; a new one must be ≥ the bound at least 90 % of times.
    const random = createRandom(5, 1);
    const draw = () => 1 + Math.floor(20 * random.uniform() ** 3);
    let kept = 0;
    for (let r = 0; r < 2000; r++) {
      const exits = Int32Array.from({ length: 59 }, draw);
      if (draw() >= orderStatistic(exits, conformalRank(59, 59, 0.9))) kept++;
    }
    // Three binomial standard errors below 0.9.
    expect(kept / 2000).toBeGreaterThan(0.9 - 3 * Math.sqrt(0.09 / 2000));
  });
});

describe('block bootstrap of a rank', () => {
  const random = createRandom(9, 1);
  const exits = Int32Array.from({ length: 400 }, () => 1 + random.integer(100));

  it('spans the order statistic and repeats with its seed', () => {
    const rank = conformalRank(400, 400, 0.9);
    const value = orderStatistic(exits, rank);
    const spread = bootstrapRank(exits, rank, 5, 0.9, 1, value);
    expect(spread.low).toBeLessThanOrEqual(value);
    expect(spread.high).toBeGreaterThanOrEqual(value);
    expect(bootstrapRank(exits, rank, 5, 0.9, 1, value)).toEqual(spread);
  });

  it('gives the binomial variance of a share for independent origins (exact: s(1 − s)/n)', () => {
    const mark = 51;
    const share = exits.filter((e) => e < mark).length / 400;
    const { shareVariance } = bootstrapRank(exits, 200, 1, 0.9, 1, mark);
    // The variance of 400 resamples has a relative standard error of √(2/399) = 7 %: three of them.
    expect(Math.abs(shareVariance / ((share * (1 - share)) / 400) - 1)).toBeLessThan(0.21);
  });

  it('sees dependence: origins in runs of ten vary as a tenth as many', () => {
    const runs = Int32Array.from({ length: 400 }, (_, i) => exits[Math.floor(i / 10)]!);
    const share = runs.filter((e) => e < 51).length / 400;
    const { shareVariance } = bootstrapRank(runs, 200, 40, 0.9, 1, 51);
    const effective = (share * (1 - share)) / shareVariance;
    expect(effective).toBeGreaterThan(20);
    expect(effective).toBeLessThan(100);
  });
});
