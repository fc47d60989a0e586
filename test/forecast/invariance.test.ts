import fc from 'fast-check';
import { beforeAll, describe, expect, it } from 'vitest';
import type { Compute } from '../../src/base/compute.ts';
import type { BackendName } from '../../src/base/kernels.ts';
import { openKernels } from '../../src/core/open.ts';
import { trustedBound } from '../../src/forecast/bound.ts';
import { forecastHeldOut, type HeldOut } from '../../src/forecast/held-out.ts';
import { boundOptions, estimateLeadTime } from '../../src/forecast/lead-time.ts';
import type { Reconstruction } from '../../src/reconstruct/types.ts';
import type { PreparedRecord } from '../../src/recording/types.ts';
import {
  expectFinding,
  inlineCompute,
  known,
  lorenz,
  plus,
  prepare,
  shape,
  unknown,
  white,
} from './helpers.ts';

const samples = plus(lorenz(1500), white(1500, 1, 0.1));
const defaults = { seed: 1, noise: unknown, largest: unknown };
let compute: Compute;
let record: PreparedRecord;
let rebuilt: Reconstruction;
let heldOut: HeldOut;

beforeAll(async () => {
  compute = inlineCompute(await openKernels({ backend: 'js' }));
  record = prepare(samples, 0.05);
  rebuilt = shape(record, 3, 3, 12, 5);
  const result = await forecastHeldOut(record, rebuilt, {}, compute);
  if ('ok' in result) throw new Error(result.why);
  heldOut = result;
});

const leadOf = (tolerance: number, confidence: number) => {
  const answer = trustedBound(record, rebuilt, heldOut, boundOptions(record, tolerance, confidence, 1));
  return answer.ok ? answer.value : 0;
};

describe('lead time', () => {
  it('never falls as the tolerance widens, until the mean serves as long', () => {
    const widths = fc.double({ min: 0.1, max: 5, noNaN: true });
    fc.assert(
      fc.property(widths, widths, (a, b) => {
        const [narrow, wide] = [leadOf(Math.min(a, b), 0.9), leadOf(Math.max(a, b), 0.9)];
        expect(wide).toBeGreaterThanOrEqual(narrow);
      }),
      { numRuns: 30 },
    );
  });

  it('never grows with the confidence asked', () => {
    const shares = fc.double({ min: 0.5, max: 0.97, noNaN: true });
    fc.assert(
      fc.property(shares, shares, (a, b) => {
        expect(leadOf(4, Math.max(a, b))).toBeLessThanOrEqual(leadOf(4, Math.min(a, b)));
      }),
      { numRuns: 30 },
    );
  });

  it('does not depend on the unit or the zero of the sensor, nor on the unit of time', async () => {
    const base = await estimateLeadTime(record, rebuilt, { ...defaults, tolerance: 4 }, compute);
    // Powers of two and a whole offset leave every scaled value the same to rounding.
    const other = prepare(
      samples.map((x) => 64 * x + 1024),
      0.1,
    );
    const same = await estimateLeadTime(
      other,
      shape(other, 3, 3, 12, 5),
      { ...defaults, tolerance: 256 },
      compute,
    );
    expect(same.predictor).toBe(base.predictor);
    expect(expectFinding(same.trusted).value).toBeCloseTo(2 * expectFinding(base.trusted).value, 9);
    expect(expectFinding(same.median).value).toBeCloseTo(2 * expectFinding(base.median).value, 9);
    expect(same.curve[5]!.rms / base.curve[5]!.rms).toBeCloseTo(64, 5);
  });

  it('answers or refuses whatever the record: short, gappy, stepped, with odd shapes', async () => {
    await fc.assert(
      fc.asyncProperty(
        fc.integer({ min: 20, max: 500 }),
        fc.integer({ min: 1, max: 12 }),
        fc.integer({ min: 1, max: 6 }),
        fc.integer({ min: 0, max: 60 }),
        fc.array(fc.integer({ min: 0, max: 499 }), { maxLength: 12 }),
        fc.constantFrom(0, 0.5, 5),
        fc.option(fc.integer({ min: 1, max: 300 }), { nil: undefined }),
        async (count, delay, delays, window, holes, step, leadSteps) => {
          const values = samples.slice(0, count).map((x) => (step > 0 ? step * Math.round(x / step) : x));
          for (const hole of holes) if (hole < count) values[hole] = Number.NaN;
          const odd = prepare(values, 0.05);
          const options = { ...defaults, ...(leadSteps === undefined ? {} : { leadSteps }) };
          const result = await estimateLeadTime(odd, shape(odd, delay, delays, window, 5), options, compute);
          expect(JSON.stringify(result)).not.toMatch(/NaN|Infinity|null/);
        },
      ),
      { numRuns: 40 },
    );
  });

  it('gives the same bits on every backend, and with the same seed', async () => {
    const options = { ...defaults, noise: known(0.1), largest: known(0.9) };
    const results: string[] = [];
    for (const backend of ['js', 'js', 'wasm-scalar', 'wasm-simd'] satisfies BackendName[]) {
      const run = inlineCompute(await openKernels({ backend }));
      results.push(JSON.stringify(await estimateLeadTime(record, rebuilt, options, run)));
    }
    expect(new Set(results).size).toBe(1);
  });
});
