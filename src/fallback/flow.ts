import { log } from '../base/elementary.ts';
import type { FlowInput, FlowResult } from '../base/kernels.ts';
import { FIELDS } from './fields.ts';
import { gramSchmidt } from './fits.ts';

/** Classical Runge–Kutta (Kutta 1901) on the state and its tangent vectors together (Benettin et al. 1980). */
export function advanceFlow(input: FlowInput): FlowResult {
  const { parameters, tangentCount: c, step, stepsPerBlock, blocks } = input;
  const field = FIELDS[input.field];
  const n = input.state.length;
  const state = input.state.slice();
  const tangents = input.tangents.slice();
  const norms = new Float64Array(blocks * c);
  const divergences = new Float64Array(blocks);
  const [k1, k2, k3, k4, stage] = [0, 1, 2, 3, 4].map(() => new Float64Array(n)) as [
    Float64Array,
    Float64Array,
    Float64Array,
    Float64Array,
    Float64Array,
  ];
  const [t1, t2, t3, t4, tangentStage] = [0, 1, 2, 3, 4].map(() => new Float64Array(n * c)) as [
    Float64Array,
    Float64Array,
    Float64Array,
    Float64Array,
    Float64Array,
  ];
  const half = step / 2;
  const sixth = step / 6;

  for (let b = 0; b < blocks; b++) {
    let divergence = 0;
    for (let s = 0; s < stepsPerBlock; s++) {
      const before = field.divergence(state, parameters);
      field.derivative(state, k1, parameters);
      field.tangent(state, tangents, t1, c, parameters);
      for (let i = 0; i < n; i++) stage[i] = state[i]! + half * k1[i]!;
      for (let i = 0; i < n * c; i++) tangentStage[i] = tangents[i]! + half * t1[i]!;
      field.derivative(stage, k2, parameters);
      field.tangent(stage, tangentStage, t2, c, parameters);
      for (let i = 0; i < n; i++) stage[i] = state[i]! + half * k2[i]!;
      for (let i = 0; i < n * c; i++) tangentStage[i] = tangents[i]! + half * t2[i]!;
      field.derivative(stage, k3, parameters);
      field.tangent(stage, tangentStage, t3, c, parameters);
      for (let i = 0; i < n; i++) stage[i] = state[i]! + step * k3[i]!;
      for (let i = 0; i < n * c; i++) tangentStage[i] = tangents[i]! + step * t3[i]!;
      field.derivative(stage, k4, parameters);
      field.tangent(stage, tangentStage, t4, c, parameters);
      for (let i = 0; i < n; i++) state[i] = state[i]! + sixth * (k1[i]! + 2 * (k2[i]! + k3[i]!) + k4[i]!);
      for (let i = 0; i < n * c; i++)
        tangents[i] = tangents[i]! + sixth * (t1[i]! + 2 * (t2[i]! + t3[i]!) + t4[i]!);
      divergence += half * (before + field.divergence(state, parameters));
    }
    divergences[b] = divergence;
    gramSchmidt(tangents, n, c, norms, b * c);
  }
  return {
    state,
    tangents,
    logNorms: norms.map((norm) => (norm > 0 ? log(norm) : Number.NEGATIVE_INFINITY)),
    divergences,
  };
}
