import { cos, exp, sin } from '../base/elementary.ts';
import type { ReferenceModel } from './types.ts';

/**
 * Doubling maps lose one binary digit a step, so that on doubles every orbit ends at 0 after 53 steps. On
 * the multiples of 1/P, P an odd prime, doubling is exact and a permutation; x is then measured in units
 * of 1/P. The largest prime below 2^31 − 1.
 */
const PRIME = 2147483629;

const modulo = (x: number, m: number) => x - m * Math.floor(x / m);

/** Maps of the literature, with exact or published exponents (natural logarithm, per step). */
export const MAPS: readonly ReferenceModel[] = [
  {
    kind: 'map',
    name: 'logistic',
    variables: ['x'],
    parameters: { r: 4 },
    start: [0.3],
    source: 'May 1976, Nature 261, 459',
    published: { exponents: [Math.LN2], source: 'exact at r = 4: ln 2' },
    field(s, out, _t, { r }) {
      out[0] = r! * s[0]! * (1 - s[0]!);
    },
    jacobian(s, out, _t, { r }) {
      out[0] = r! * (1 - 2 * s[0]!);
    },
  },
  {
    kind: 'map',
    name: 'tent',
    variables: ['x'],
    parameters: { size: PRIME },
    start: [314159265],
    source: 'tent map of slope 2 on [0, size], exact on integers (see maps.ts)',
    published: { exponents: [Math.LN2], source: 'exact: ln 2' },
    field(s, out, _t, { size }) {
      const doubled = 2 * s[0]!;
      out[0] = doubled <= size! ? doubled : 2 * (size! - s[0]!);
    },
    jacobian(s, out, _t, { size }) {
      out[0] = 2 * s[0]! <= size! ? 2 : -2;
    },
  },
  {
    kind: 'map',
    name: 'cat',
    variables: ['x', 'y'],
    parameters: {},
    start: [0.1234567890123, 0.7654321098765],
    source: 'Arnold & Avez 1968, Ergodic Problems of Classical Mechanics',
    // ln((3 + √5)/2)
    published: { exponents: [0.9624236501192069, -0.9624236501192069], source: 'exact: ±ln((3 + √5)/2)' },
    field(s, out) {
      out[0] = modulo(2 * s[0]! + s[1]!, 1);
      out[1] = modulo(s[0]! + s[1]!, 1);
    },
    jacobian(_s, out) {
      out[0] = 2;
      out[1] = 1;
      out[2] = 1;
      out[3] = 1;
    },
  },
  {
    kind: 'map',
    name: 'baker',
    variables: ['x', 'y'],
    parameters: { width: 0.3, left: 0.25, right: 0.4 },
    start: [0.21, 0.37],
    source: 'generalised baker’s map, Farmer, Ott & Yorke 1983, Physica D 7, 153',
    // −p ln p − q ln q and p ln a + q ln b
    published: {
      exponents: [0.6108643020548935, -1.0572916902432786],
      source: 'exact: −p ln p − q ln q, p ln a + q ln b',
    },
    field(s, out, _t, { width, left, right }) {
      const below = s[1]! < width!;
      out[0] = below ? left! * s[0]! : 1 - right! + right! * s[0]!;
      out[1] = below ? s[1]! / width! : (s[1]! - width!) / (1 - width!);
    },
    jacobian(s, out, _t, { width, left, right }) {
      const below = s[1]! < width!;
      out[0] = below ? left! : right!;
      out[1] = 0;
      out[2] = 0;
      out[3] = 1 / (below ? width! : 1 - width!);
    },
  },
  {
    kind: 'map',
    name: 'henon',
    variables: ['x', 'y'],
    parameters: { a: 1.4, b: 0.3 },
    start: [0.1, 0.1],
    source: 'Hénon 1976, Commun. Math. Phys. 50, 69',
    published: {
      exponents: [0.41922, -1.62319],
      source: 'Sprott 2003, Chaos and Time-Series Analysis; sum = ln 0.3 exact',
    },
    field(s, out, _t, { a, b }) {
      out[0] = 1 - a! * s[0]! * s[0]! + s[1]!;
      out[1] = b! * s[0]!;
    },
    jacobian(s, out, _t, { a, b }) {
      out[0] = -2 * a! * s[0]!;
      out[1] = 1;
      out[2] = b!;
      out[3] = 0;
    },
  },
  {
    kind: 'map',
    name: 'ikeda',
    variables: ['x', 'y'],
    parameters: { u: 0.9 },
    start: [0.1, 0.1],
    source: 'Ikeda 1979, Opt. Commun. 30, 257; phase 0.4 − 6/(1 + x² + y²)',
    field(s, out, _t, { u }) {
      const x = s[0]!;
      const y = s[1]!;
      const phase = 0.4 - 6 / (1 + x * x + y * y);
      const c = cos(phase);
      const d = sin(phase);
      out[0] = 1 + u! * (x * c - y * d);
      out[1] = u! * (x * d + y * c);
    },
    jacobian(s, out, _t, { u }) {
      const x = s[0]!;
      const y = s[1]!;
      const square = 1 + x * x + y * y;
      const phase = 0.4 - 6 / square;
      const slope = 12 / (square * square);
      const c = cos(phase);
      const d = sin(phase);
      const along = x * c - y * d;
      const across = x * d + y * c;
      out[0] = u! * (c - across * slope * x);
      out[1] = u! * (-d - across * slope * y);
      out[2] = u! * (d + along * slope * x);
      out[3] = u! * (c + along * slope * y);
    },
  },
  {
    kind: 'map',
    name: 'lozi',
    variables: ['x', 'y'],
    parameters: { a: 1.7, b: 0.5 },
    start: [0.1, 0.1],
    source: 'Lozi 1978, J. Phys. Colloq. 39, C5-9',
    field(s, out, _t, { a, b }) {
      out[0] = 1 - a! * Math.abs(s[0]!) + s[1]!;
      out[1] = b! * s[0]!;
    },
    jacobian(s, out, _t, { a, b }) {
      out[0] = s[0]! < 0 ? a! : -a!;
      out[1] = 1;
      out[2] = b!;
      out[3] = 0;
    },
  },
  {
    kind: 'map',
    name: 'standard',
    variables: ['angle', 'momentum'],
    parameters: { k: 1 },
    start: [0.001, 0],
    source: 'Chirikov 1979, Phys. Rep. 52, 263; the start lies in the chaotic sea, near the hyperbolic point',
    published: {
      exponents: [0.10497, -0.10497],
      source: 'Sprott 2003, Chaos and Time-Series Analysis, k = 1',
    },
    field(s, out, _t, { k }) {
      const momentum = s[1]! + k! * sin(s[0]!);
      out[0] = modulo(s[0]! + momentum, 2 * Math.PI);
      out[1] = modulo(momentum + Math.PI, 2 * Math.PI) - Math.PI;
    },
    jacobian(s, out, _t, { k }) {
      const slope = k! * cos(s[0]!);
      out[0] = 1 + slope;
      out[1] = 1;
      out[2] = slope;
      out[3] = 1;
    },
  },
  {
    kind: 'map',
    name: 'kaplan-yorke',
    variables: ['x', 'y'],
    parameters: { alpha: 0.2, size: PRIME },
    start: [314159265, 0.1],
    source:
      'Kaplan & Yorke 1979, Lect. Notes Math. 730, 204; x in units of 1/size, exact on integers (see maps.ts)',
    // ln 2, ln α
    published: { exponents: [Math.LN2, -1.6094379124341003], source: 'exact: ln 2, ln α' },
    field(s, out, _t, { alpha, size }) {
      out[0] = modulo(2 * s[0]!, size!);
      out[1] = alpha! * s[1]! + cos((4 * Math.PI * s[0]!) / size!);
    },
    jacobian(s, out, _t, { alpha, size }) {
      out[0] = 2;
      out[1] = 0;
      out[2] = -((4 * Math.PI) / size!) * sin((4 * Math.PI * s[0]!) / size!);
      out[3] = alpha!;
    },
  },
  {
    kind: 'map',
    name: 'generalised-henon',
    variables: ['x', 'y', 'z'],
    parameters: { a: 1.76, b: 0.1 },
    start: [0.1, 0.1, 0.1],
    source: 'Baier & Klein 1990, Phys. Lett. A 151, 281 (hyperchaotic)',
    field(s, out, _t, { a, b }) {
      out[0] = a! - s[1]! * s[1]! - b! * s[2]!;
      out[1] = s[0]!;
      out[2] = s[1]!;
    },
    jacobian(s, out, _t, { b }) {
      out.fill(0);
      out[1] = -2 * s[1]!;
      out[2] = -b!;
      out[3] = 1;
      out[7] = 1;
    },
  },
  {
    kind: 'map',
    name: 'strange-nonchaotic',
    variables: ['x', 'theta'],
    parameters: { sigma: 1.5 },
    start: [0.5, 0.1],
    source: 'Grebogi, Ott, Pelikan & Yorke 1984, Physica D 13, 261: strange, not chaotic',
    field(s, out, _t, { sigma }) {
      out[0] = 2 * sigma! * tanh(s[0]!) * cos(2 * Math.PI * s[1]!);
      out[1] = modulo(s[1]! + GOLDEN, 1);
    },
    jacobian(s, out, _t, { sigma }) {
      const t = tanh(s[0]!);
      out[0] = 2 * sigma! * (1 - t * t) * cos(2 * Math.PI * s[1]!);
      out[1] = -4 * Math.PI * sigma! * t * sin(2 * Math.PI * s[1]!);
      out[2] = 0;
      out[3] = 1;
    },
  },
];

/** (√5 − 1)/2. */
const GOLDEN = (Math.sqrt(5) - 1) / 2;

function tanh(x: number): number {
  const e = exp(-2 * Math.abs(x));
  const t = (1 - e) / (1 + e);
  return x < 0 ? -t : t;
}
