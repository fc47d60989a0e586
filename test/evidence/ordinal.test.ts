import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { ordinalCounts, permutationEntropy } from '../../src/evidence/ordinal.ts';
import { white } from '../panel/processes.ts';
import { map } from '../panel/systems.ts';

const record = (values: Float64Array, segments = [{ start: 0, end: values.length }]) => ({
  scaled: values,
  count: values.length,
  target: 0,
  segments,
});

describe('ordinal patterns', () => {
  it('of white noise are equally likely: entropy ln m! (exact)', () => {
    for (const [order, factorial] of [
      [3, 6],
      [4, 24],
    ] as const) {
      const { counts, windows } = ordinalCounts(record(white(50_000, 1)), 1, order);
      // The estimate is low by (patterns − 1) / 2n on average (Miller 1955), 2e-4 here, and varies by less.
      expect(Math.abs(permutationEntropy(counts, windows) - Math.log(factorial))).toBeLessThan(1e-3);
    }
  });

  it('of the logistic map at r = 4 never fall three times (published: Bandt & Pompe 2002)', () => {
    const { counts } = ordinalCounts(record(map(([x]) => [4 * x! * (1 - x!)], [0.3])(20_000, 1)), 1, 3);
    expect(counts[5]).toBe(0);
    expect(counts.slice(0, 5).every((count) => count > 100)).toBe(true);
  });

  it('are those of sorting by value, for any window without ties (exact)', () => {
    fc.assert(
      fc.property(fc.uniqueArray(fc.integer(), { minLength: 4, maxLength: 4 }), (values) => {
        const { counts, windows } = ordinalCounts(record(Float64Array.from(values)), 1, 4);
        expect(windows).toBe(1);
        const ascending = values.every((v, i) => i === 0 || v > values[i - 1]!);
        const descending = values.every((v, i) => i === 0 || v < values[i - 1]!);
        expect(counts[0] === 1).toBe(ascending);
        expect(counts[23] === 1).toBe(descending);
      }),
    );
  });

  it('leave out windows with ties and windows that bridge a gap', () => {
    const values = Float64Array.of(1, 2, 3, 3, 5, 6, 7, 9);
    expect(ordinalCounts(record(values), 1, 3).windows).toBe(4);
    const gap = [
      { start: 0, end: 3 },
      { start: 5, end: 8 },
    ];
    expect(ordinalCounts(record(values, gap), 1, 3).windows).toBe(2);
  });
});
