import { type Compute, runToEnd } from '../../src/base/compute.ts';
import type { Kernels } from '../../src/base/kernels.ts';
import { createRandom } from '../../src/base/random.ts';

/** Records for the tests of recording and reconstruction, made here so that they test no code of the library. */

/** Runs tasks to their end on this thread. */
export function inline(kernels: Kernels): Compute {
  const compute: Compute = {
    run: async (task, input) => runToEnd(task, kernels, input),
    map: async (task, inputs) => inputs.map((input) => runToEnd(task, kernels, input)),
    part: () => compute,
    finish: () => {},
    throwIfAborted: () => {},
    breathe: async () => {},
    memoryLimit: 2 ** 30,
  };
  return compute;
}

type Field = (state: readonly number[]) => number[];

/** States of a flow at steps of `interval` after a transient (classical Runge–Kutta, `substeps` to a sample). */
export function flow(
  field: Field,
  start: readonly number[],
  interval: number,
  count: number,
  substeps = 4,
): number[][] {
  const h = interval / substeps;
  const plus = (a: readonly number[], b: readonly number[], f: number) => a.map((v, i) => v + f * b[i]!);
  const states: number[][] = [];
  let s = [...start];
  for (let i = -500; i < count; i++) {
    if (i >= 0) states.push(s);
    for (let k = 0; k < substeps; k++) {
      const a = field(s);
      const b = field(plus(s, a, h / 2));
      const c = field(plus(s, b, h / 2));
      const d = field(plus(s, c, h));
      s = s.map((v, j) => v + (h / 6) * (a[j]! + 2 * b[j]! + 2 * c[j]! + d[j]!));
    }
  }
  return states;
}

export const lorenzField =
  (r = 28): Field =>
  ([x, y, z]) => [10 * (y! - x!), x! * (r - z!) - y!, x! * y! - (8 / 3) * z!];

export function lorenz(interval: number, count: number, r = 28, start = [1, 1, 20]): Float64Array {
  return Float64Array.from(flow(lorenzField(r), start, interval, count), (s) => s[0]!);
}

export function rossler(interval: number, count: number): Float64Array {
  const field: Field = ([x, y, z]) => [-y! - z!, x! + 0.2 * y!, 0.2 + z! * (x! - 5.7)];
  return Float64Array.from(flow(field, [1, 1, 0], interval, count), (s) => s[0]!);
}

export function henon(count: number, a = 1.4, start = 0.1): Float64Array {
  let [x, y] = [start, 0.1];
  const next = () => {
    [x, y] = [1 - a * x * x + y, 0.3 * x];
    return x;
  };
  for (let i = 0; i < 100; i++) next();
  return Float64Array.from({ length: count }, next);
}

export function white(count: number, seed = 1): Float64Array {
  const random = createRandom(seed, 77);
  return Float64Array.from({ length: count }, () => random.normal());
}

/** First-order autoregression started in its stationary distribution. */
export function autoregression(count: number, phi: number, seed = 1): Float64Array {
  const noise = white(count, seed);
  let x = noise[0]! / Math.sqrt(1 - phi * phi);
  return noise.map((e, i) => {
    if (i > 0) x = phi * x + e;
    return x;
  });
}

export function sine(count: number, period: number, phase = 0): Float64Array {
  return Float64Array.from({ length: count }, (_, i) => Math.sin((2 * Math.PI * i) / period + phase));
}

/** Adds white noise of `share` standard deviations. */
export function noisy(values: Float64Array, share: number, seed = 5): Float64Array {
  const mean = values.reduce((s, v) => s + v, 0) / values.length;
  const std = Math.sqrt(values.reduce((s, v) => s + (v - mean) ** 2, 0) / values.length);
  const noise = white(values.length, seed);
  return values.map((v, i) => v + share * std * noise[i]!);
}

export function joined(a: Float64Array, b: Float64Array): Float64Array {
  const out = new Float64Array(a.length + b.length);
  out.set(a);
  out.set(b, a.length);
  return out;
}
