import { describe, expect, it } from 'vitest';
import { createRandom } from '../../src/base/random.ts';
import { latticeStep } from '../../src/recording/lattice.ts';
import { prepareRecording } from '../../src/recording/prepare.ts';
import { blockingProblem } from '../../src/recording/quality.ts';

const noise = (n: number, seed = 1) => {
  const random = createRandom(seed);
  return Float64Array.from({ length: n }, () => random.normal());
};
const sine = (n: number, period: number) =>
  Float64Array.from({ length: n }, (_, i) => Math.sin((2 * Math.PI * i) / period));
const quantise = (values: Float64Array, step: number) => values.map((v) => Math.round(v / step) * step);
const codes = (samples: ArrayLike<number>) =>
  prepareRecording({ samples: Float64Array.from(samples), interval: 1 }).quality.problems.map((p) => p.code);
/** x of the Lorenz system, classical Runge–Kutta. */
function lorenz(n: number, dt: number) {
  const f = ([x, y, z]: number[]) => [10 * (y! - x!), x! * (28 - z!) - y!, x! * y! - (8 / 3) * z!];
  let s = [1, 1, 20];
  const add = (a: number[], b: number[], h: number) => a.map((v, i) => v + h * b[i]!);
  const out = new Float64Array(n);
  const sub = 5;
  for (let i = -500; i < n; i++) {
    for (let k = 0; k < sub; k++) {
      const h = dt / sub;
      const a = f(s);
      const b = f(add(s, a, h / 2));
      const c = f(add(s, b, h / 2));
      const d = f(add(s, c, h));
      s = s.map((v, j) => v + (h / 6) * (a[j]! + 2 * b[j]! + 2 * c[j]! + d[j]!));
    }
    if (i >= 0) out[i] = s[0]!;
  }
  return out;
}

describe('resolution', () => {
  it.each([
    ['0.1 in decimal', noise(2000).map((v) => Math.round(v * 10) / 10), 0.1],
    ['0.1 by multiplication', noise(2000).map((v) => Math.round(v * 10) * 0.1), 0.1],
    [
      '12 bit over ±10 V',
      quantise(
        sine(5000, 37.3).map((v) => 8 * v),
        20 / 4096,
      ),
      20 / 4096,
    ],
    ['whole numbers', noise(2000).map((v) => Math.round(v * 100)), 1],
    ['thousandths on an offset of 1e5', noise(2000).map((v) => Math.round(1e8 + v * 1e3) / 1e3), 1e-3],
    ['ten coarse levels', quantise(noise(3000), 0.7), 0.7],
    ['two levels', noise(500).map((v) => (v > 0 ? 5 : 0)), 5],
    [
      'rounded in text: 20/4096 V printed to 1 mV',
      quantise(
        noise(20000).map((v) => 3 * v),
        20 / 4096,
      ).map((v) => Math.round(v * 1000) / 1000),
      1e-3,
    ],
  ])('finds %s', (_, samples, step) => {
    const record = prepareRecording({ samples, interval: 1 });
    expect(record.resolutionSource).toBe('found');
    expect(record.resolutionStep / step).toBeCloseTo(1, 6);
  });

  it('of decimal steps kept in float32', () => {
    const samples = Float32Array.from(noise(4000), (v) => Math.round(v * 20) / 20);
    expect(prepareRecording({ samples, interval: 1 }).resolutionStep).toBeCloseTo(0.05, 6);
  });

  it('of the number format, where an offset eats the digits', () => {
    // Doubles near 1e9 are 2^-23 apart.
    const samples = noise(3000).map((v) => 1e9 + 1e-6 * v);
    expect(prepareRecording({ samples, interval: 1 }).resolutionStep).toBe(2 ** -23);
  });

  it('finds none where values are continuous', () => {
    for (let seed = 1; seed <= 30; seed++)
      for (const n of [50, 200, 1000]) expect(latticeStep(noise(n, seed).sort())).toBe(0);
    expect(latticeStep(lorenz(3000, 0.05).sort())).toBe(0);
    expect(prepareRecording({ samples: noise(1000), interval: 1 }).resolutionSource).toBe('none-found');
  });

  it('given by the caller is taken', () => {
    const record = prepareRecording({ samples: noise(1000), interval: 1, resolution: 0.02 });
    expect([record.resolutionStep, record.resolutionSource]).toEqual([0.02, 'given']);
  });
});

describe('clipping', () => {
  it.each([
    ['Lorenz', lorenz(4000, 0.05), 12],
    ['noise', noise(4000), 1.5],
    ['a sine', sine(4000, 41.7), 0.9],
  ])('of %s is seen', (_, samples, level) => {
    const clipped = samples.map((v) => Math.max(-level, Math.min(level, v)));
    expect(codes(clipped)).toContain('SATURATED');
    expect(codes(quantise(clipped, level / 500))).toContain('SATURATED');
    expect(codes(samples)).not.toContain('SATURATED');
  });

  it('of a few samples is a remark', () => {
    const samples = noise(4000).map((v) => Math.min(2.8, v));
    expect(codes(samples)).toContain('CLIPPED_BRIEFLY');
    expect(blockingProblem(prepareRecording({ samples, interval: 1 }))).toBeUndefined();
  });

  it('is not what a coarse quantiser does to a smooth extremum', () => {
    for (const period of [7.3, 23.17, 50, 131.9])
      for (const levels of [6, 8, 10, 16, 33, 100, 1000])
        for (const phase of [0, 0.13, 0.37]) {
          const samples = quantise(
            sine(6000, period).map((v) => v + phase / levels),
            2 / levels,
          );
          expect(codes(samples), `period ${period}, ${levels} levels`).not.toContain('SATURATED');
        }
    for (const step of [0.05, 0.2, 1, 3, 5]) {
      expect(codes(quantise(lorenz(4000, 0.05), step)), `Lorenz, step ${step}`).not.toContain('SATURATED');
      expect(codes(quantise(lorenz(4000, 0.01), step)), `Lorenz fine, step ${step}`).not.toContain(
        'SATURATED',
      );
    }
    for (let seed = 1; seed <= 20; seed++)
      for (const step of [0.01, 0.1, 0.5])
        expect(codes(quantise(noise(3000, seed), step))).not.toContain('SATURATED');
  });

  it('at a bound of zero may be nature: a remark up to a tenth of the record', () => {
    // Monthly counts, rainfall: many zeros, none below.
    const counts = (level: number) => noise(4000).map((v) => Math.max(0, v + level));
    expect(codes(counts(1.7))).toEqual(['BOUNDED_BY_ZERO']);
    expect(codes(counts(0.5))).toContain('SATURATED');
    const rest = counts(2.5).fill(0, 700, 750);
    expect(codes(rest)).toEqual(['BOUNDED_BY_ZERO']);
  });

  it('is not seen in the logistic map, whose density is singular at both ends', () => {
    let x = 0.3;
    const samples = Float64Array.from({ length: 5000 }, () => (x = 4 * x * (1 - x)));
    expect(codes(samples)).toEqual([]);
    for (const step of [0.1, 0.01, 0.001]) expect(codes(quantise(samples, step))).toEqual([]);
  });
});

describe('stuck sensor', () => {
  it('is seen, in the middle and at the end', () => {
    const samples = lorenz(5000, 0.05);
    const middle = samples.slice().fill(samples[2000]!, 2000, 2300);
    expect(codes(middle)).toContain('STUCK');
    const end = samples.slice().fill(samples[3000]!, 3000);
    expect(codes(end)).toContain('STUCK');
    expect(codes(noise(3000).fill(0.5, 700, 800))).toContain('STUCK');
    expect(prepareRecording({ samples: middle, interval: 1 }).quality.longestRun).toBe(300);
  });

  it('for a moment is a remark', () => {
    expect(codes(noise(10000).fill(0.5, 700, 740))).toContain('STUCK_BRIEFLY');
  });

  it('is not what a quantiser does to slow turning points', () => {
    for (const step of [0.001, 0.01, 0.1, 0.25])
      expect(codes(quantise(sine(20000, 900), step)).join()).not.toMatch(/STUCK/);
    for (const step of [0.01, 0.1, 1, 4])
      expect(codes(quantise(lorenz(8000, 0.01), step)).join()).not.toMatch(/STUCK/);
  });

  it('on a missing stretch does not run through', () => {
    const samples = noise(3000);
    for (let i = 500; i < 900; i++) samples[i] = Number.NaN;
    expect(codes(samples)).toEqual([]);
    expect(prepareRecording({ samples, interval: 1 }).quality.longestRun).toBe(1);
  });
});

describe('poor records', () => {
  it('constant', () => {
    expect(codes(new Float64Array(500).fill(7.25))).toContain('CONSTANT');
    // Rounding noise of a computed constant.
    expect(codes(Float64Array.from({ length: 500 }, (_, i) => (i % 3) * 1e-16 + 1))).toContain('CONSTANT');
    const record = prepareRecording({ samples: new Float64Array(500).fill(7.25), interval: 1 });
    expect([record.means[0], record.stds[0]]).toEqual([7.25, 0]);
    expect(record.scaled.every((v) => v === 0)).toBe(true);
  });

  it('a constant channel beside a good one is a remark', () => {
    const record = prepareRecording({ samples: [noise(500), new Float64Array(500).fill(3)], interval: 1 });
    expect(record.quality.problems.map((p) => p.code)).toEqual(['CHANNEL_CONSTANT']);
    expect(blockingProblem(record)).toBeUndefined();
  });

  it('short', () => {
    expect(codes([1])).toContain('TOO_SHORT');
    expect(codes(noise(199))).toContain('TOO_SHORT');
    expect(codes(noise(500))).toEqual([]);
    const blocked = blockingProblem(prepareRecording({ samples: noise(150), interval: 1 }));
    expect(blocked).toMatchObject({ ok: false, code: 'TOO_SHORT', parameters: { count: 150, needed: 200 } });
  });

  it('with few cycles', () => {
    expect(codes(sine(2000, 400))).toContain('TOO_SHORT');
    expect(codes(sine(2000, 50))).toEqual([]);
    // A ramp never comes back.
    expect(codes(Float64Array.from({ length: 1000 }, (_, i) => i))).toContain('TOO_SHORT');
  });

  it('a trend does not hide the cycles on it', () => {
    expect(codes(sine(4000, 40).map((v, i) => v + i / 500))).toEqual([]);
  });

  it('of two levels: rounding hides the distances', () => {
    expect(codes(noise(1000).map((v) => (v > 0 ? 1 : 0)))).toContain('NOISE_FLOOR');
    expect(codes(quantise(noise(1000), 0.5))).toEqual([]);
  });

  it('sampled far too fast says so', () => {
    expect(codes(sine(20000, 500))).toEqual(['OVERSAMPLED']);
  });
});

describe('cycles', () => {
  it.each([7.3, 40, 133.7])('of a sine of period %d', (period) => {
    const record = prepareRecording({ samples: sine(5000, period), interval: 1 });
    expect(record.quality.samplesPerCycle! / period).toBeCloseTo(1, 2);
  });

  it('are not multiplied by noise', () => {
    const random = noise(5000);
    const record = prepareRecording({
      samples: sine(5000, 100).map((v, i) => v + 0.1 * random[i]!),
      interval: 1,
    });
    expect(record.quality.samplesPerCycle! / 100).toBeCloseTo(1, 1);
  });
});
