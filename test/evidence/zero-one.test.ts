import { beforeAll, describe, expect, it } from 'vitest';
import { runToEnd } from '../../src/base/compute.ts';
import type { Kernels } from '../../src/base/kernels.ts';
import { openKernels } from '../../src/core/open.ts';
import { zeroOneTask } from '../../src/evidence/zero-one.ts';
import { white } from '../panel/processes.ts';
import { map } from '../panel/systems.ts';

let kernels: Kernels;
beforeAll(async () => {
  kernels = await openKernels();
});
const score = (samples: Float64Array, seed = 1) => runToEnd(zeroOneTask, kernels, { samples, seed });

describe('0–1 test', () => {
  it('is near 1 for the logistic map at r = 4 (published: Gottwald & Melbourne 2009)', () => {
    expect(score(map(([x]) => [4 * x! * (1 - x!)], [0.3])(2000, 1))).toBeGreaterThan(0.97);
  });

  it('is near 0 for a rotation and for a periodic orbit (same source)', () => {
    const rotation = Float64Array.from({ length: 2000 }, (_, i) => Math.cos(2 * Math.PI * 0.3819660113 * i));
    expect(Math.abs(score(rotation)!)).toBeLessThan(0.1);
    expect(Math.abs(score(map(([x]) => [3.55 * x! * (1 - x!)], [0.4])(2000, 1))!)).toBeLessThan(0.1);
  });

  it('is near 1 for noise too: it tells regular from irregular only', () => {
    expect(score(white(2000, 3))).toBeGreaterThan(0.97);
  });

  it('does not depend on offset and unit, hardly on the seed; refuses short input', () => {
    const x = map(([x]) => [3.7 * x! * (1 - x!)], [0.3])(1000, 2);
    const a = score(x)!;
    expect(
      Math.abs(
        score(
          x.map((v) => 1000 * v),
          1,
        )! - a,
      ),
    ).toBeLessThan(1e-6);
    expect(Math.abs(score(x, 9)! - a)).toBeLessThan(0.02);
    expect(score(x.slice(0, 199))).toBeUndefined();
  });
});
