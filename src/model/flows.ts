import type { FieldName } from '../base/kernels.ts';
import { FIELDS } from '../fallback/fields.ts';
import type { Parameters, ReferenceModel } from './types.ts';

interface FlowSpec {
  readonly name: string;
  readonly field: FieldName;
  readonly variables: readonly string[];
  readonly parameters: Parameters;
  readonly start: readonly number[];
  readonly step: number;
  readonly sampling: number;
  readonly source: string;
  readonly published?: ReferenceModel['published'];
}

/** A flow whose field is built into the kernels: the functions below are the same code, called one by one. */
function flow(spec: FlowSpec): ReferenceModel {
  const { derivative, tangent } = FIELDS[spec.field];
  const names = Object.keys(spec.parameters);
  const packed = (parameters: Parameters) => Float64Array.from(names, (name) => parameters[name]!);
  const n = spec.variables.length;
  const identity = new Float64Array(n * n);
  for (let i = 0; i < n; i++) identity[i * (n + 1)] = 1;
  return {
    kind: 'flow',
    name: spec.name,
    source: spec.source,
    variables: spec.variables,
    parameters: spec.parameters,
    start: spec.start,
    step: spec.step,
    sampling: spec.sampling,
    ...(spec.published ? { published: spec.published } : {}),
    kernel: { field: spec.field, parameters: names },
    field: (state, out, _time, parameters) => derivative(state, out, packed(parameters)),
    jacobian: (state, out, _time, parameters) => tangent(state, identity, out, n, packed(parameters)),
  };
}

const XYZ = ['x', 'y', 'z'] as const;

/** Flows of the literature, with their published exponents (natural logarithm, per time unit). */
export const FLOWS: readonly ReferenceModel[] = [
  flow({
    name: 'lorenz',
    field: 'lorenz',
    variables: XYZ,
    parameters: { sigma: 10, rho: 28, beta: 8 / 3 },
    start: [1, 1, 20],
    step: 0.005,
    sampling: 0.05,
    source: 'Lorenz 1963, J. Atmos. Sci. 20, 130',
    published: { exponents: [0.9056, 0, -14.5723], source: 'Sprott 2003, Chaos and Time-Series Analysis' },
  }),
  flow({
    name: 'lorenz-wolf',
    field: 'lorenz',
    variables: XYZ,
    parameters: { sigma: 16, rho: 45.92, beta: 4 },
    start: [1, 1, 30],
    step: 0.0025,
    sampling: 0.03,
    source: 'Lorenz 1963 with the parameters of Wolf et al. 1985, Physica D 16, 285',
    published: {
      exponents: [1.497, 0, -22.46],
      source: 'Wolf et al. 1985, Physica D 16, 285 (2.16, 0, −32.4 bits)',
    },
  }),
  flow({
    name: 'rossler',
    field: 'rossler',
    variables: XYZ,
    parameters: { a: 0.2, b: 0.2, c: 5.7 },
    start: [1, 1, 0],
    step: 0.01,
    sampling: 0.2,
    source: 'Rössler 1976, Phys. Lett. A 57, 397',
    published: { exponents: [0.0714, 0, -5.3943], source: 'Sprott 2003, Chaos and Time-Series Analysis' },
  }),
  flow({
    name: 'rossler-wolf',
    field: 'rossler',
    variables: XYZ,
    parameters: { a: 0.15, b: 0.2, c: 10 },
    start: [1, 1, 0],
    step: 0.01,
    sampling: 0.2,
    source: 'Rössler 1976 with the parameters of Wolf et al. 1985, Physica D 16, 285',
    published: {
      exponents: [0.09, 0, -9.77],
      source: 'Wolf et al. 1985, Physica D 16, 285 (0.13, 0, −14.1 bits)',
    },
  }),
  flow({
    name: 'hyperchaotic-rossler',
    field: 'hyperchaotic-rossler',
    variables: ['x', 'y', 'z', 'w'],
    parameters: { a: 0.25, b: 3, c: 0.05, d: 0.5 },
    start: [-20, 0, 0, 15],
    step: 0.005,
    sampling: 0.2,
    source: 'Rössler 1979, Phys. Lett. A 71, 155',
    published: {
      exponents: [0.111, 0.021, 0, -27],
      source: 'Wolf et al. 1985, Physica D 16, 285 (0.16, 0.03, 0, −39 bits)',
    },
  }),
  flow({
    name: 'chua',
    field: 'chua',
    variables: XYZ,
    parameters: { alpha: 9, beta: 100 / 7, inner: -8 / 7, outer: -5 / 7 },
    start: [0.1, 0, 0],
    step: 0.01,
    sampling: 0.1,
    source: 'Matsumoto 1984, IEEE Trans. Circuits Syst. 31, 1055',
    published: { exponents: [0.3271, 0, -2.5197], source: 'Sprott 2003, Chaos and Time-Series Analysis' },
  }),
  flow({
    name: 'ueda',
    field: 'ueda',
    variables: ['x', 'v', 'phase'],
    parameters: { damping: 0.05, drive: 7.5 },
    start: [2.5, 0, 0],
    step: 0.01,
    sampling: 0.2,
    source: 'Ueda 1979, J. Stat. Phys. 20, 181',
    published: { exponents: [0.1034, 0, -0.1534], source: 'Sprott 2003, Chaos and Time-Series Analysis' },
  }),
  flow({
    name: 'quadratic-jerk',
    field: 'quadratic-jerk',
    variables: ['x', 'v', 'a'],
    parameters: { damping: 2.017 },
    start: [0, 0, 1],
    step: 0.02,
    sampling: 0.4,
    source: 'Sprott 1997, Phys. Lett. A 228, 271',
    published: { exponents: [0.0551, 0, -2.0721], source: 'Sprott 1997, Phys. Lett. A 228, 271' },
  }),
  flow({
    name: 'lorenz-96',
    field: 'lorenz-96',
    variables: Array.from({ length: 40 }, (_, i) => `x${i + 1}`),
    parameters: { forcing: 8 },
    start: Array.from({ length: 40 }, (_, i) => (i === 19 ? 8.01 : 8)),
    step: 0.01,
    sampling: 0.05,
    source: 'Lorenz 1996, Proc. Seminar on Predictability, ECMWF; 40 variables',
    published: {
      exponents: [1.68],
      source: 'Lorenz & Emanuel 1998, J. Atmos. Sci. 55, 399 (doubling time 2.1 days)',
    },
  }),
];
