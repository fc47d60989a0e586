import { beforeAll, describe, expect, it } from 'vitest';
import { runToEnd } from '../../src/base/compute.ts';
import type { Kernels } from '../../src/base/kernels.ts';
import { openKernels } from '../../src/core/open.ts';
import { monomialCount } from '../../src/forecast/polynomial.ts';
import { channelOf, lagOf, type PredictorSpec } from '../../src/forecast/predictors.ts';
import { afterTheEnd, everyLead, prepareSetting } from '../../src/forecast/setting.ts';
import { predictTask } from '../../src/forecast/task.ts';
import { henon, lorenzPair, plus, prepare, roessler, shape, white } from './helpers.ts';

let kernels: Kernels;
beforeAll(async () => {
  kernels = await openKernels({ backend: 'js' });
});

const SPECS: PredictorSpec[] = [
  { kind: 'climatology' },
  { kind: 'persistence' },
  { kind: 'linear' },
  { kind: 'local', order: 0, neighbours: 8, ridge: 0, step: 0 },
  { kind: 'local', order: 1, neighbours: 16, ridge: 1e-6, step: 0 },
  { kind: 'local', order: 1, neighbours: 16, ridge: 1e-6, step: 3 },
  { kind: 'polynomial', degree: 2, ridge: 1e-6, step: 1 },
  { kind: 'polynomial', degree: 3, ridge: 1e-6, step: 4 },
];

describe('coordinates', () => {
  it('channel and lag of an offset c·count − lag', () => {
    for (const [offset, channel, lag] of [
      [0, 0, 0],
      [-5, 0, 5],
      [100, 1, 0],
      [93, 1, 7],
      [199, 2, 1],
    ] as const) {
      expect(channelOf(offset, 100)).toBe(channel);
      expect(lagOf(offset, 100)).toBe(lag);
    }
  });
});

describe('predictors', () => {
  it('linear: continues a noise-free second-order recursion (exact)', () => {
    // x' = 2 cos(w) x − x(−1) is a sine; order by BIC must not hide it.
    const w = 0.37;
    const record = prepare(Float64Array.from({ length: 600 }, (_, t) => Math.sin(w * t)));
    const { setting } = prepareSetting(record, shape(record, 4, 3, 20, 4), 20);
    const origins = Int32Array.of(100, 300, 500);
    const leads = everyLead(20);
    const [values] = runToEnd(predictTask, kernels, { setting, specs: [{ kind: 'linear' }], origins, leads });
    for (let i = 0; i < 3; i++)
      for (let h = 0; h < 20; h++)
        expect(values![i * 20 + h]).toBeCloseTo(setting.data[origins[i]! + h + 1]!, 5);
  });

  it('polynomial: finds a quadratic map and iterates it (exact for the Hénon map)', () => {
    const record = prepare(henon(1500));
    const { setting } = prepareSetting(record, shape(record, 1, 2, 4, 1), 8);
    const origins = Int32Array.of(200, 700, 1200);
    const leads = everyLead(8);
    const spec: PredictorSpec = { kind: 'polynomial', degree: 2, ridge: 1e-9, step: 1 };
    const [values] = runToEnd(predictTask, kernels, { setting, specs: [spec], origins, leads });
    // Ridge 1e-9 leaves one-step errors of about 1e-8, which eight steps of growth e^0.42 multiply by 30.
    for (let i = 0; i < 3; i++)
      for (let h = 0; h < 8; h++)
        expect(Math.abs(values![i * 8 + h]! - setting.data[origins[i]! + h + 1]!)).toBeLessThan(1e-5);
  });

  it('polynomial: counts its monomials (exact: binomial)', () => {
    expect(monomialCount(6, 3)).toBe(84);
    expect(monomialCount(2, 2)).toBe(6);
    expect(monomialCount(4, 1)).toBe(5);
  });

  it('local: mean and linear map agree with brute force', () => {
    const record = prepare(roessler(400));
    const { setting } = prepareSetting(record, shape(record, 5, 3, 10, 5), 5);
    const origins = Int32Array.of(150, 250);
    const spec: PredictorSpec = { kind: 'local', order: 0, neighbours: 6, ridge: 0, step: 0 };
    const [values] = runToEnd(predictTask, kernels, {
      setting,
      specs: [spec],
      origins,
      leads: Int32Array.of(1, 5),
    });
    origins.forEach((o, i) => {
      const near = [...setting.library]
        .filter((t) => Math.abs(t - o) > setting.exclusion)
        .map((t) => {
          const d = Math.sqrt(
            [...setting.offsets].reduce((s, k) => s + (setting.data[t + k]! - setting.data[o + k]!) ** 2, 0),
          );
          return { t, d };
        })
        .sort((a, b) => a.d - b.d || a.t - b.t)
        .slice(0, 6);
      const far = near[5]!.d * 1.0001;
      const weights = near.map(({ d }) => (1 - (d / far) ** 3) ** 3);
      const total = weights.reduce((s, x) => s + x, 0);
      [1, 5].forEach((lead, l) => {
        const mean = near.reduce((s, { t }, j) => s + weights[j]! * setting.data[t + lead]!, 0) / total;
        expect(values![i * 2 + l]).toBeCloseTo(mean, 10);
      });
    });
  });

  it('none sees the future of its origin: changing it changes no forecast', () => {
    const [x, z] = lorenzPair(900);
    const record = prepare([plus(x, white(900, 3, 0.2)), z]);
    const { setting } = prepareSetting(record, shape(record, 3, 2, 15, 5), 12);
    const origin = 450;
    const origins = Int32Array.of(origin);
    const leads = everyLead(12);
    const before = runToEnd(predictTask, kernels, { setting, specs: SPECS, origins, leads });
    const data = setting.data.slice();
    for (let c = 0; c < 2; c++)
      // Within the range of the record, which bounds what a forecast may say.
      for (let t = origin + 1; t <= origin + 12; t++) data[c * record.count + t]! *= 0.5;
    const changed = { ...setting, data };
    const after = runToEnd(predictTask, kernels, { setting: changed, specs: SPECS, origins, leads });
    SPECS.forEach((spec, i) => {
      expect(after[i], spec.kind).toEqual(before[i]);
    });
  });

  it('all stay finite and within the range of the record, also from a poor fit', () => {
    const record = prepare(white(400, 8));
    const { setting } = prepareSetting(record, shape(record, 1, 3, 2, 1), 60);
    const wild: PredictorSpec = { kind: 'polynomial', degree: 3, ridge: 0, step: 1 };
    const outputs = runToEnd(predictTask, kernels, {
      setting,
      specs: [...SPECS, wild],
      origins: Int32Array.of(150, 200),
      leads: everyLead(60),
    });
    const width = Math.max(...setting.data) - Math.min(...setting.data);
    for (const values of outputs)
      for (const v of values) {
        expect(v).toBeLessThanOrEqual(Math.max(...setting.data) + 0.1001 * width);
        expect(v).toBeGreaterThanOrEqual(Math.min(...setting.data) - 0.1001 * width);
      }
  });

  it('forecast beyond the last sample and beside gaps', () => {
    const samples = roessler(800);
    for (let t = 300; t < 310; t++) samples[t] = Number.NaN;
    samples[500] = Number.NaN;
    const record = prepare(samples);
    const { setting, starts } = prepareSetting(record, shape(record, 5, 3, 20, 5), 10);
    for (const t of starts)
      for (let k = t - 10; k <= t + 10; k++) expect(record.present[k], `sample ${k} of vector ${t}`).toBe(1);
    const outputs = runToEnd(predictTask, kernels, {
      setting: afterTheEnd(setting, 20),
      specs: SPECS.filter((s) => s.kind !== 'climatology'),
      origins: Int32Array.of(320, 799),
      leads: everyLead(10),
    });
    for (const values of outputs) for (const v of values) expect(Number.isFinite(v)).toBe(true);
  });
});
