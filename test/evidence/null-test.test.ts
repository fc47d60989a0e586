import { beforeAll, describe, expect, it } from 'vitest';
import type { Kernels } from '../../src/base/kernels.ts';
import { createRandom } from '../../src/base/random.ts';
import { openKernels } from '../../src/core/open.ts';
import { nullTest, rankPValue, timeAsymmetry } from '../../src/evidence/null-test.ts';
import type { NullTestResult } from '../../src/evidence/types.ts';
import type { Reconstruction } from '../../src/reconstruct/types.ts';
import { prepareRecording } from '../../src/recording/prepare.ts';
import { inlineCompute } from '../geometry/compute.ts';

let kernels: Kernels;
beforeAll(async () => {
  kernels = await openKernels();
});

/** Gaussian autoregression of order 2. */
function linear(n: number, a: number, b: number, seed: number): Float64Array {
  const random = createRandom(seed);
  const x = new Float64Array(n);
  let [x1, x2] = [0, 0];
  for (let t = -500; t < n; t++) {
    const next = a * x1 + b * x2 + random.normal();
    [x1, x2] = [next, x1];
    if (t >= 0) x[t] = next;
  }
  return x;
}

/** The null test of a series, with the one thing it takes from a reconstruction. */
async function test(
  series: Float64Array,
  correlationTime: number,
  surrogates: number,
  seed: number,
): Promise<NullTestResult> {
  const record = prepareRecording({ samples: series, interval: 1 });
  const reconstruction = {
    correlationTime: { samples: correlationTime, time: correlationTime },
  } as Reconstruction;
  const result = await nullTest(record, reconstruction, { surrogates, seed }, inlineCompute(kernels));
  if ('ok' in result) throw new Error(result.why);
  return result;
}

describe('level of the surrogate test (exact: a true null is rejected with its nominal probability)', () => {
  it.each([
    ['AR(1), 0.7', 0.7, 0, 3, (x: number) => x],
    ['AR(2), resonance', 1.6, -0.9, 3, (x: number) => x],
    ['AR(1), 0.7, cubed', 0.7, 0, 3, (x: number) => x * x * x],
  ])('%s', async (_name, a, b, correlationTime, distort) => {
    const records = 60;
    let rejected = 0;
    for (let i = 0; i < records; i++) {
      const x = linear(512, a, b, 1000 + i).map(distort);
      if ((await test(x, correlationTime, 19, i)).rejected) rejected++;
    }
    // 60 records at 5 %: 3 expected; more than 9 happen by chance in 1 of 1,000 (binomial, exact).
    expect(rejected).toBeLessThanOrEqual(9);
  });
});

describe('power', () => {
  it('rejects for chaos: the Hénon map with 10 % noise', async () => {
    const random = createRandom(3);
    let [x, y] = [0.1, 0.1];
    const record = Float64Array.from({ length: 700 }, () => {
      [x, y] = [1 - 1.4 * x * x + y, 0.3 * x];
      return x + 0.07 * random.normal();
    });
    const result = await test(record, 1, 39, 1);
    expect(result.pValue).toBe(1 / 40); // the smallest there is, 1 / (surrogates + 1)
    expect(result.asymmetry.surrogates).toHaveLength(39);
  });
});

describe('direction of time', () => {
  it('is nil for a Gaussian process and seen in a sawtooth', () => {
    expect(Math.abs(timeAsymmetry(linear(20_000, 0.5, 0, 7), 1))).toBeLessThan(0.1);
    const sawtooth = Float64Array.from({ length: 1000 }, (_, t) => t % 20);
    expect(timeAsymmetry(sawtooth, 1)).toBeLessThan(-3);
  });

  it('changes its sign with the direction (exact)', () => {
    const x = linear(500, 0.5, 0.2, 8).map((v) => Math.exp(v / 3));
    expect(timeAsymmetry(x.slice().reverse(), 3)).toBeCloseTo(-timeAsymmetry(x, 3), 10);
  });
});

describe('rank p-value (exact)', () => {
  it('counts ties against the record', () => {
    expect(rankPValue(1, [2, 3, 4])).toBe(0.25);
    expect(rankPValue(2, [2, 3, 4])).toBe(0.5);
    expect(rankPValue(5, [2, 3, 4])).toBe(1);
  });
});
