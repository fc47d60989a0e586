import { describe, expect, it } from 'vitest';
import { runToEnd } from '../../src/base/compute.ts';
import { openKernels } from '../../src/core/open.ts';
import { octaveSlope, takensEstimate } from '../../src/geometry/curve.ts';
import { LogSums } from '../../src/geometry/log-sums.ts';
import { FEWEST_PAIRS, findScalingRegion, firstEdge } from '../../src/geometry/scaling.ts';
import { completeVectors, setUpSums, smallestExponent } from '../../src/geometry/setup.ts';
import { correlationSumsTask } from '../../src/geometry/sums.ts';
import { prepare, shape } from './compute.ts';
import { white } from './records.ts';

/** Blocks of pair counts with C = (r / 2^6)^d in dimension m ≥ d, the same in every block. */
function powerLaw(d: (m: number) => number, dimensions: number, blocks = 20) {
  const radii = (b: number) => 2 ** (b >> 2) * (1 + (b & 3) / 4);
  const pairs = 1e9;
  const counts = new Float64Array(dimensions * 64);
  for (let m = 1; m <= dimensions; m++)
    for (let b = 0; b < 64; b++)
      counts[(m - 1) * 64 + b] = Math.round(pairs * Math.min(1, (radii(b) / 2 ** 16) ** d(m)));
  return new LogSums(
    Array.from({ length: blocks }, () => ({ counts, pairs })),
    dimensions,
    0,
  );
}

describe('logarithms of correlation sums', () => {
  it('gives the exponent of a power law, by line, octave and Takens', () => {
    const sums = powerLaw(() => 1.5, 4);
    expect(sums.slope(0, 2, 30, 50)).toBeCloseTo(1.5, 5);
    expect(octaveSlope(sums, 0, 2, 40)!).toBeCloseTo(1.5, 5);
    expect(takensEstimate(sums, 0, 2, 30, 50)!).toBeCloseTo(1.5, 5);
    expect(sums.standardError((v) => sums.slope(v, 2, 30, 50))).toBeLessThan(1e-7);
  });

  it('finds the region and the agreeing dimensions of min(m, 2.5)', () => {
    const sums = powerLaw((m) => Math.min(m, 2.5), 8);
    const { best } = findScalingRegion(sums, 2 ** 16);
    expect(best).toMatchObject({ firstDimension: 3, lastDimension: 8 });
    expect(best!.slope).toBeCloseTo(2.5, 2);
    expect(best!.from).toBe(firstEdge(sums, 8));
    expect(sums.count(8, best!.from)).toBeGreaterThanOrEqual(FEWEST_PAIRS);
    expect(sums.radii[best!.to]!).toBeLessThanOrEqual(0.1 * 2 ** 16);
  });

  it('finds none where the slope is the embedding dimension', () => {
    expect(
      findScalingRegion(
        powerLaw((m) => m, 8),
        2 ** 16,
      ).best,
    ).toBeNull();
  });

  it('doubles the jackknife error of a mean over blocks', () => {
    // Blocks whose ln C at one edge is spread: the delete-one jackknife of a mean is its standard error.
    const pairs = 1e6;
    const blocks = Array.from({ length: 20 }, (_, i) => {
      const counts = new Float64Array(64);
      for (let b = 0; b < 64; b++) counts[b] = 1000 + (b === 10 ? i : 0);
      return { counts, pairs };
    });
    const sums = new LogSums(blocks, 1, 0);
    const values = blocks.map((b) => b.counts[10]!);
    const mean = values.reduce((a, b) => a + b) / 20;
    const deviation = Math.sqrt(values.reduce((a, b) => a + (b - mean) ** 2, 0) / 19);
    expect(sums.standardError((v) => sums.log(v, 1, 10))).toBeCloseTo(
      (2 * deviation) / Math.sqrt(20) / mean,
      6,
    );
  });
});

describe('set-up of correlation sums', () => {
  it('marks vectors that lie in one unbroken run', () => {
    expect([...completeVectors(Uint8Array.of(1, 1, 1, 0, 1, 1, 1, 1), 1, 3)]).toEqual([1, 0, 0, 0, 1, 1]);
    expect([...completeVectors(Uint8Array.of(1, 1, 0, 1), 2, 2)]).toEqual([0, 0]);
  });

  it('ends the radius grid at the range', () => {
    for (const range of [0.3, 1, 1.75, 1.76, 5.2, 900]) {
      const largest = 2 ** (smallestExponent(range) + 15) * 1.75;
      expect(largest).toBeGreaterThanOrEqual(range);
      expect(largest).toBeLessThan(2 * range + 1e-9);
    }
  });

  it('bridges no gap and refuses a record without room', () => {
    const samples = white(3000, 1);
    samples.fill(Number.NaN, 1000, 1010);
    const record = prepare(samples);
    const setup = setUpSums(record, shape(record, 3, 3, 6, 1), { seed: 1 });
    if ('ok' in setup) throw new Error(setup.why);
    const span = (setup.dimensions - 1) * 3;
    for (let t = 1000 - span; t < 1010; t++) expect(setup.valid[t]).toBe(0);
    for (const block of setup.blocks) for (const r of block) expect(setup.valid[r]).toBe(1);
    const short = setUpSums(prepare(white(250, 1)), shape(record, 40, 3, 80, 2), { seed: 1 });
    expect(short).toMatchObject({ ok: false, code: 'TOO_SHORT' });
  });

  it('counts what brute force counts, with the plain and the wide exclusion', async () => {
    const kernels = await openKernels();
    const record = prepare(white(400, 2));
    const setup = setUpSums(record, shape(record, 2, 2, 5, 1), {
      seed: 3,
      maximumDimension: 5,
      references: 40,
    });
    if ('ok' in setup) throw new Error(setup.why);
    const references = setup.blocks.reduce<number[]>((all, b) => all.concat(...b), []);
    const { blocks: _, range: __, samples: ___, ...common } = setup;
    const found = runToEnd(correlationSumsTask, kernels, {
      ...common,
      references: Int32Array.from(references),
      wideExclusion: 50,
    });
    const brute = (points: readonly number[], exclusion: number, m: number, radius: number) => {
      let n = 0;
      for (const r of points)
        for (let t = 0; t < setup.valid.length; t++) {
          if (Math.abs(t - r) <= exclusion) continue;
          let distance = 0;
          for (let d = 0; d < m; d++)
            distance = Math.max(distance, Math.abs(setup.series[r + 2 * d]! - setup.series[t + 2 * d]!));
          if (distance < radius) n++;
        }
      return n;
    };
    const some = references.filter((_, i) => i % 4 === 0);
    for (const m of [1, 3, 5])
      for (const b of [40, 52, 60]) {
        const radius = 2 ** (setup.smallestExponent + (b >> 2)) * (1 + (b & 3) / 4);
        const at = (m - 1) * 64 + b;
        expect(found.all.counts[at]).toBe(brute(references, setup.exclusion, m, radius));
        expect(found.wide.counts[at]).toBe(brute(some, 50, m, radius));
      }
  });
});
