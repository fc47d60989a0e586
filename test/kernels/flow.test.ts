import { beforeAll, describe, expect, it } from 'vitest';
import type { FieldName, Kernels } from '../../src/base/kernels.ts';
import { createRandom } from '../../src/base/random.ts';
import { openKernels } from '../../src/core/open.ts';
import { FIELDS } from '../../src/fallback/fields.ts';
import { referenceModel, referenceModelNames } from '../../src/model/reference.ts';

let backends: Kernels[];
beforeAll(async () => {
  backends = await Promise.all(
    (['js', 'wasm-scalar', 'wasm-simd'] as const).map((backend) => openKernels({ backend })),
  );
});

const flows = referenceModelNames()
  .map((name) => referenceModel(name))
  .filter((model) => model.kernel !== undefined);

describe.each(flows.map((model) => [model.name, model] as const))('%s', (_name, model) => {
  const n = model.variables.length;
  const parameters = Float64Array.from(model.kernel!.parameters, (p) => model.parameters[p]!);
  const field: FieldName = model.kernel!.field;

  it.each([1, 2, n])('advances with the same bits on every backend, %i tangents', (count) => {
    if (count > n) return;
    const random = createRandom(count);
    const input = {
      field,
      parameters,
      state: Float64Array.from(model.start),
      tangents: Float64Array.from({ length: n * count }, () => random.normal()),
      tangentCount: count,
      step: model.step!,
      stepsPerBlock: 7,
      blocks: n > 10 ? 5 : 60,
    };
    const [first, ...others] = backends.map((kernels) => kernels.advanceFlow(input));
    for (const other of others) expect(other).toEqual(first);
    expect(first!.logNorms.every(Number.isFinite)).toBe(true);
    // Orthonormal columns, to rounding.
    for (let a = 0; a < count; a++)
      for (let b = 0; b <= a; b++) {
        let dot = 0;
        for (let i = 0; i < n; i++) dot += first!.tangents[i * count + a]! * first!.tangents[i * count + b]!;
        expect(dot).toBeCloseTo(a === b ? 1 : 0, 9);
      }
  });

  it('has a Jacobian that central differences confirm, and its trace as divergence', () => {
    const { derivative, divergence } = FIELDS[field];
    const random = createRandom(3);
    const state = Float64Array.from(model.start, (x) => x + 0.1 * random.normal());
    const jacobian = new Float64Array(n * n);
    model.jacobian!(state, jacobian, 0, model.parameters);
    const [high, low] = [new Float64Array(n), new Float64Array(n)];
    let trace = 0;
    for (let j = 0; j < n; j++) {
      const h = 1e-6;
      const moved = state.slice();
      moved[j] = state[j]! + h;
      derivative(moved, high, parameters);
      moved[j] = state[j]! - h;
      derivative(moved, low, parameters);
      // Error of central differences: h² times third derivatives plus rounding / h.
      for (let i = 0; i < n; i++) expect(jacobian[i * n + j]!).toBeCloseTo((high[i]! - low[i]!) / (2 * h), 5);
      trace += jacobian[j * n + j]!;
    }
    expect(divergence(state, parameters)).toBeCloseTo(trace, 10);
  });
});

describe('Runge–Kutta order', () => {
  it('is four: halving the step divides the error by about sixteen (exact order, Kutta 1901)', () => {
    const run = (steps: number) => {
      const { state } = backends[2]!.advanceFlow({
        field: 'rossler',
        parameters: Float64Array.of(0.2, 0.2, 5.7),
        state: Float64Array.of(1, 1, 0),
        tangents: Float64Array.of(1, 0, 0),
        tangentCount: 1,
        step: 2 / steps,
        stepsPerBlock: steps,
        blocks: 1,
      });
      return state[0]!;
    };
    const truth = run(20_000);
    const ratio = Math.abs(run(40) - truth) / Math.abs(run(80) - truth);
    expect(ratio).toBeGreaterThan(13);
    expect(ratio).toBeLessThan(20);
  });
});
