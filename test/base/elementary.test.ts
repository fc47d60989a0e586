import { describe, expect, it } from 'vitest';
import { cos, exp, log, log2, log10, pow, powerOfTwo, sin } from '../../src/base/elementary.ts';
import { createRandom } from '../../src/base/random.ts';

/** Distance in units in the last place of `b`. */
function ulps(a: number, b: number): number {
  if (Object.is(a, b) || a === b) return 0;
  const size = Math.max(Math.abs(b), 2 ** -1022);
  return Math.abs(a - b) / 2 ** (Math.floor(Math.log2(size)) - 52);
}

/**
 * The host's functions are a general-purpose reference here: those of V8 are within one unit in the last
 * place, and so are these, so two units is what two right answers may differ by.
 */
describe('elementary functions against the host', () => {
  const random = createRandom(1);
  it.each([
    ['log', log, Math.log, () => exp(1400 * random.uniform() - 700)],
    ['log near 1', log, Math.log, () => 1 + 0.3 * (random.uniform() - 0.5)],
    ['exp', exp, Math.exp, () => 1400 * random.uniform() - 700],
    ['sin', sin, Math.sin, () => 20 * (random.uniform() - 0.5)],
    ['sin, far', sin, Math.sin, () => 3e6 * (random.uniform() - 0.5)],
    ['cos', cos, Math.cos, () => 20 * (random.uniform() - 0.5)],
    ['cos, far', cos, Math.cos, () => 3e6 * (random.uniform() - 0.5)],
  ] as const)('%s', (_name, ours, host, draw) => {
    let worst = 0;
    for (let i = 0; i < 50_000; i++) {
      const x = draw();
      worst = Math.max(worst, ulps(ours(x), host(x)));
    }
    expect(worst).toBeLessThanOrEqual(2);
  });
});

describe('elementary functions at known places', () => {
  it('log and exp (exact and limits)', () => {
    expect(log(1)).toBe(0);
    expect(log(0)).toBe(Number.NEGATIVE_INFINITY);
    expect(log(-1)).toBeNaN();
    expect(log(Number.NaN)).toBeNaN();
    expect(log(Number.POSITIVE_INFINITY)).toBe(Number.POSITIVE_INFINITY);
    expect(log(2)).toBe(0.6931471805599453);
    expect(ulps(log(5e-324), -744.4400719213812)).toBeLessThanOrEqual(1); // −1074 ln 2
    expect(exp(0)).toBe(1);
    expect(ulps(exp(1), Math.E)).toBeLessThanOrEqual(1);
    expect(exp(710)).toBe(Number.POSITIVE_INFINITY);
    expect(exp(-746)).toBe(0);
    expect(exp(-745)).toBe(5e-324);
  });

  it('sin and cos near multiples of π, where cancellation is worst', () => {
    // sin(π as a double) = π − double(π) to first order: 1.2246467991473531773e-16 (exact to its digits).
    expect(sin(Math.PI)).toBe(1.2246467991473532e-16);
    expect(cos(Math.PI / 2)).toBe(6.123233995736766e-17);
    expect(ulps(sin(1001 * Math.PI), Math.sin(1001 * Math.PI))).toBeLessThanOrEqual(1);
    expect(sin(Number.POSITIVE_INFINITY)).toBeNaN();
    expect(() => sin(1e9)).toThrow(/2\^20/);
  });

  it('identities to rounding', () => {
    const random = createRandom(2);
    for (let i = 0; i < 2000; i++) {
      const x = 100 * (random.uniform() - 0.5);
      expect(sin(x) * sin(x) + cos(x) * cos(x)).toBeCloseTo(1, 14);
      expect(exp(log(Math.abs(x) + 1e-9))).toBeCloseTo(Math.abs(x) + 1e-9, 10);
    }
  });

  it('helpers', () => {
    for (let k = -1022; k <= 1023; k += 31) expect(powerOfTwo(k)).toBe(2 ** k);
    expect(log2(8)).toBeCloseTo(3, 14);
    expect(log10(1000)).toBeCloseTo(3, 14);
    expect(pow(2, 0.5)).toBeCloseTo(Math.SQRT2, 14);
    expect(pow(0, 2)).toBe(0);
    expect(pow(0, 0)).toBe(1);
  });
});
