import { log } from '../base/elementary.ts';
import { LeadspanError } from '../base/errors.ts';
import type { Kernels } from '../base/kernels.ts';
import { gramSchmidt } from '../fallback/fits.ts';
import { DormandPrince } from './integrate.ts';
import type { FunctionModel, ReferenceModel } from './types.ts';

/** What one call of a tangent system gives: row-major blocks × exponents, and ∫ divergence per block. */
export interface TangentBlocks {
  readonly logNorms: Float64Array;
  readonly divergences: Float64Array;
}

/**
 * A model with its tangent vectors, advanced in blocks with Gram–Schmidt between (Benettin et al. 1980,
 * Meccanica 15, 9; Shimada & Nagashima 1979, Prog. Theor. Phys. 61, 1605).
 */
export interface TangentSystem {
  /** Time units (steps) per block. */
  readonly blockTime: number;
  readonly derivatives: 'given' | 'kernel' | 'central differences';
  readonly step: number | null;
  readonly method: string;
  advance(blocks: number): TangentBlocks;
  /** Moves the state only, as far as the transient. */
  skip(duration: number): void;
  state(): number[];
}

/** Identity columns: n × k, row-major. */
function identity(n: number, k: number): Float64Array {
  const matrix = new Float64Array(n * k);
  for (let i = 0; i < k; i++) matrix[i * k + i] = 1;
  return matrix;
}

/** A flow whose field is built into the kernels. */
export function kernelFlow(
  kernels: Kernels,
  model: ReferenceModel,
  count: number,
  step: number,
): TangentSystem {
  const { field, parameters: names } = model.kernel!;
  const parameters = Float64Array.from(names, (name) => model.parameters[name]!);
  const stepsPerBlock = 10;
  let state = Float64Array.from(model.start);
  let tangents = identity(state.length, count);
  const advance = (blocks: number) => {
    const result = kernels.advanceFlow({
      field,
      parameters,
      state,
      tangents,
      tangentCount: count,
      step,
      stepsPerBlock,
      blocks,
    });
    state = result.state as Float64Array<ArrayBuffer>;
    tangents = result.tangents as Float64Array<ArrayBuffer>;
    if (!state.every(Number.isFinite)) throw runaway();
    return result;
  };
  return {
    blockTime: stepsPerBlock * step,
    derivatives: 'kernel',
    step,
    method:
      'variational equations by the classical Runge–Kutta scheme of order 4 (Kutta 1901), Gram–Schmidt (Benettin et al. 1980; Shimada & Nagashima 1979)',
    advance,
    // Tangents align with the leading directions meanwhile, which is welcome.
    skip: (duration) => {
      const blocks = Math.ceil(duration / (stepsPerBlock * step));
      if (blocks > 0) advance(blocks);
    },
    state: () => Array.from(state),
  };
}

/** A flow given as functions: state and tangents together by an adaptive scheme. */
export function functionFlow(model: FunctionModel, count: number): TangentSystem {
  const n = model.variables.length;
  const parameters = model.parameters ?? {};
  const jacobian = jacobianOf(model);
  const matrix = new Float64Array(n * n);
  const y = new Float64Array(n + n * count);
  y.set(model.start);
  y.set(identity(n, count), n);
  const stateView = y.subarray(0, n);
  const slope = new Float64Array(n);
  let trace = 0;
  const derivative = (t: number, at: Float64Array, out: Float64Array) => {
    const state = at.subarray(0, n);
    model.field(state, slope, t, parameters);
    jacobian(state, matrix, t);
    out.set(slope);
    for (let i = 0; i < n; i++)
      for (let c = 0; c < count; c++) {
        let sum = 0;
        for (let j = 0; j < n; j++) sum += matrix[i * n + j]! * at[n + j * count + c]!;
        out[n + i * count + c] = sum;
      }
  };
  const divergence = (t: number) => {
    jacobian(stateView, matrix, t);
    trace = 0;
    for (let i = 0; i < n; i++) trace += matrix[i * n + i]!;
    return trace;
  };
  const together = new DormandPrince(derivative, y.length);
  const alone = new DormandPrince((t, s, out) => model.field(s, out, t, parameters), n);
  const blockTime = blockTimeOf(model, divergence);
  /** Parts of a block over which the divergence is integrated by Simpson's rule. */
  const parts = 4;
  let time = 0;
  return {
    blockTime,
    derivatives: model.jacobian ? 'given' : 'central differences',
    step: null,
    method:
      'variational equations by the adaptive Runge–Kutta scheme of order 5 (Dormand & Prince 1980), Gram–Schmidt (Benettin et al. 1980; Shimada & Nagashima 1979)',
    advance: (blocks) => {
      const logNorms = new Float64Array(blocks * count);
      const divergences = new Float64Array(blocks);
      for (let b = 0; b < blocks; b++) {
        const start = time;
        let integral = divergence(start);
        for (let p = 1; p <= parts; p++) {
          const to = start + (blockTime * p) / parts;
          together.advance(y, time, to);
          time = to;
          integral += divergence(time) * (p === parts ? 1 : p % 2 === 1 ? 4 : 2);
        }
        divergences[b] = (integral * blockTime) / (3 * parts);
        gramSchmidt(y.subarray(n), n, count, logNorms, b * count);
      }
      return { logNorms: logNorms.map(logOrLowest), divergences };
    },
    skip: (duration) => {
      if (duration <= 0) return;
      alone.advance(stateView, time, time + duration);
      time += duration;
    },
    state: () => Array.from(stateView),
  };
}

/** A map given as functions. One step per block: strong contraction leaves no digits after several. */
export function functionMap(model: FunctionModel, count: number): TangentSystem {
  const n = model.variables.length;
  const parameters = model.parameters ?? {};
  const jacobian = jacobianOf(model);
  const matrix = new Float64Array(n * n);
  const product = new Float64Array(n * count);
  let state = Float64Array.from(model.start);
  let next = new Float64Array(n);
  const tangents = identity(n, count);
  let time = 0;
  const step = () => {
    model.field(state, next, time, parameters);
    for (let i = 0; i < n; i++) if (!Number.isFinite(next[i]!)) throw runaway();
    [state, next] = [next, state];
    time++;
  };
  return {
    blockTime: 1,
    derivatives: model.jacobian ? 'given' : 'central differences',
    step: null,
    method:
      'Jacobians along the orbit with Gram–Schmidt at every step (Benettin et al. 1980; Shimada & Nagashima 1979)',
    advance: (blocks) => {
      const logNorms = new Float64Array(blocks * count);
      const divergences = new Float64Array(blocks);
      for (let b = 0; b < blocks; b++) {
        jacobian(state, matrix, time);
        for (let i = 0; i < n; i++)
          for (let c = 0; c < count; c++) {
            let sum = 0;
            for (let j = 0; j < n; j++) sum += matrix[i * n + j]! * tangents[j * count + c]!;
            product[i * count + c] = sum;
          }
        tangents.set(product);
        gramSchmidt(tangents, n, count, logNorms, b * count);
        divergences[b] = logOrLowest(Math.abs(determinant(matrix, n)));
        step();
      }
      return { logNorms: logNorms.map(logOrLowest), divergences };
    },
    skip: (duration) => {
      for (let i = 0; i < duration; i++) step();
    },
    state: () => Array.from(state),
  };
}

/** A vanishing growth factor (a critical point hit exactly) counts as the smallest normal double, not as −Infinity. */
const LOWEST = log(2 ** -1022);
const logOrLowest = (x: number) => (x > 0 ? log(x) : LOWEST);

function runaway(): LeadspanError {
  return new LeadspanError(
    'BAD_INPUT',
    'The orbit of the model runs away from its start: a state is not finite.',
    { field: 'model.start' },
  );
}

/**
 * The model's own Jacobian, or central differences with steps of the cube root of the rounding unit times
 * the size of the variable (Press et al. 1992, 5.7): about ten right digits.
 */
function jacobianOf(model: FunctionModel): (state: Float64Array, out: Float64Array, time: number) => void {
  const parameters = model.parameters ?? {};
  if (model.jacobian) {
    const given = model.jacobian.bind(model);
    return (state, out, time) => given(state, out, time, parameters);
  }
  const n = model.variables.length;
  const CUBE_ROOT = 6.055454452393343e-6;
  const [high, low, moved] = [new Float64Array(n), new Float64Array(n), new Float64Array(n)];
  return (state, out, time) => {
    moved.set(state);
    for (let j = 0; j < n; j++) {
      const x = state[j]!;
      const h = CUBE_ROOT * Math.max(Math.abs(x), 1);
      moved[j] = x + h;
      const up = moved[j]!;
      model.field(moved, high, time, parameters);
      moved[j] = x - h;
      const width = up - moved[j]!;
      model.field(moved, low, time, parameters);
      moved[j] = x;
      for (let i = 0; i < n; i++) out[i * n + j] = (high[i]! - low[i]!) / width;
    }
  };
}

/** Determinant by elimination with partial pivots. */
function determinant(matrix: Float64Array, n: number): number {
  const a = matrix.slice();
  let result = 1;
  for (let j = 0; j < n; j++) {
    let pivot = j;
    for (let i = j + 1; i < n; i++) if (Math.abs(a[i * n + j]!) > Math.abs(a[pivot * n + j]!)) pivot = i;
    const value = a[pivot * n + j]!;
    if (value === 0) return 0;
    if (pivot !== j) {
      result = -result;
      for (let c = j; c < n; c++) [a[j * n + c], a[pivot * n + c]] = [a[pivot * n + c]!, a[j * n + c]!];
    }
    result *= value;
    for (let i = j + 1; i < n; i++) {
      const factor = a[i * n + j]! / value;
      for (let c = j; c < n; c++) a[i * n + c] = a[i * n + c]! - factor * a[j * n + c]!;
    }
  }
  return result;
}

/** Time between orthonormalisations: small beside the fastest contraction, so that no direction loses its digits. */
function blockTimeOf(model: FunctionModel, divergence: (t: number) => number): number {
  const rate = Math.abs(divergence(0)) / model.variables.length;
  return Math.min(1, Math.max(1e-3, 1 / Math.max(rate, 1e-9)));
}
