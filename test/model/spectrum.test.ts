import { beforeAll, describe, expect, it } from 'vitest';
import type { Compute } from '../../src/base/compute.ts';
import { referenceModel } from '../../src/model/reference.ts';
import { simulate } from '../../src/model/simulate.ts';
import { modelSpectrum } from '../../src/model/spectrum.ts';
import type { FunctionModel } from '../../src/model/types.ts';
import { openCompute } from '../geometry/compute.ts';

let compute: Compute;
beforeAll(async () => {
  compute = await openCompute();
});

const lorenz: FunctionModel = {
  kind: 'flow',
  variables: ['x', 'y', 'z'],
  parameters: { s: 10, r: 28, b: 8 / 3 },
  field([x, y, z], out, _t, { s, r, b }) {
    out[0] = s! * (y! - x!);
    out[1] = x! * (r! - z!) - y!;
    out[2] = x! * y! - b! * z!;
  },
  jacobian([x, y, z], out, _t, { s, r, b }) {
    out.set([-s!, s!, 0, r! - z!, -1, -x!, y!, x!, -b!]);
  },
  start: [1, 1, 20],
};

describe('spectrum of a model given as functions', () => {
  it('agrees with the independent value of the Lorenz system (ours: 0.905495 ± 0.000089) and its exact sum', async () => {
    const { exponents, standardErrors, checks, derivatives } = await modelSpectrum(
      lorenz,
      { duration: 400, seed: 1 },
      compute,
    );
    expect(derivatives).toBe('given');
    const first = exponents[0]!;
    if (!first.ok) throw new Error(first.why);
    expect(Math.abs(first.value - 0.905495)).toBeLessThan(3 * Math.hypot(standardErrors[0]!, 8.9e-5));
    expect(checks.sum).toBeCloseTo(-41 / 3, 5);
    expect(checks).toMatchObject({ divergenceAgrees: true, zeroAgrees: true });
  });

  it('uses central differences without a Jacobian, says so, and finds the same', async () => {
    const { jacobian: _given, ...bare } = lorenz;
    const [a, b] = await Promise.all(
      [lorenz, bare].map((model) => modelSpectrum(model, { duration: 200, seed: 1 }, compute)),
    );
    expect(b!.derivatives).toBe('central differences');
    // The tangents take part in the step control, so the two orbits part: equal up to sampling.
    for (const i of [0, 2]) {
      const [x, y] = [a!.exponents[i]!, b!.exponents[i]!];
      if (!x.ok || !y.ok) throw new Error('refused');
      expect(Math.abs(x.value - y.value)).toBeLessThan(
        3 * Math.hypot(a!.standardErrors[i]!, b!.standardErrors[i]!),
      );
    }
    expect(b!.checks.sum).toBeCloseTo(-41 / 3, 4);
  });

  it('stops at a wanted standard error', async () => {
    const { standardErrors } = await modelSpectrum('henon', { standardError: 0.002, seed: 1 }, compute);
    expect(standardErrors[0]).toBeLessThanOrEqual(0.002);
  });

  it.each([
    [{ ...lorenz, kind: 'ode' }, /model\.kind must be 'flow' or 'map'; got "ode"/],
    [{ ...lorenz, start: [1, 2] }, /model\.start must be 3 finite numbers/],
    [{ ...lorenz, field: 3 }, /model\.field must be a function/],
    [{ ...lorenz, variables: ['x', 'x', 'z'] }, /distinct names/],
    [{ ...lorenz, parameters: { s: Number.NaN } }, /model\.parameters\.s must be a finite number/],
    ['lorenz-97', /did you mean "lorenz-96"/],
  ])('refuses a wrong model %#', async (model, message) => {
    await expect(modelSpectrum(model as never, { seed: 1 }, compute)).rejects.toThrow(message);
  });

  it('says so when the orbit runs away or the field gives no number', async () => {
    const away: FunctionModel = {
      kind: 'map',
      variables: ['x'],
      start: [2],
      field: ([x], out) => {
        out[0] = x! * x! * x!;
      },
    };
    await expect(modelSpectrum(away, { seed: 1 }, compute)).rejects.toMatchObject({
      code: 'BAD_INPUT',
      field: 'model.start',
    });
    const broken: FunctionModel = {
      kind: 'flow',
      variables: ['x'],
      start: [2],
      field: (_s, out) => {
        out[0] = Number.NaN;
      },
    };
    await expect(modelSpectrum(broken, { seed: 1 }, compute)).rejects.toMatchObject({
      code: 'BAD_INPUT',
      field: 'model.field',
    });
  });
});

describe('simulate', () => {
  it('follows the exact solution of a linear oscillator', () => {
    const oscillator: FunctionModel = {
      kind: 'flow',
      variables: ['x', 'v'],
      start: [1, 0],
      field([x, v], out) {
        out[0] = v!;
        out[1] = -x!;
      },
    };
    const { x } = simulate(oscillator, { samples: 100, interval: 0.5 });
    for (let i = 0; i < 100; i++) expect(x![i]).toBeCloseTo(Math.cos(0.5 * i), 5);
  });

  it('iterates maps and refuses a run-away', () => {
    expect(Array.from(simulate('logistic', { samples: 3 }).x!)).toEqual([
      0.3,
      0.84,
      expect.closeTo(0.5376, 12),
    ]);
    expect(() => simulate(referenceModel('henon', { a: 3 }), { samples: 100 })).toThrow(/runs away/);
    expect(() => simulate('lorenz', { samples: 0 })).toThrow(/samples/);
  });
});
