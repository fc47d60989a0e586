import type { Answer, Finding } from '../../src/base/answer.ts';
import { type Compute, runToEnd } from '../../src/base/compute.ts';
import type { Kernels } from '../../src/base/kernels.ts';
import { createRandom } from '../../src/base/random.ts';
import type { Reconstruction } from '../../src/reconstruct/types.ts';
import { prepareRecording } from '../../src/recording/prepare.ts';
import type { PreparedRecord, Recording } from '../../src/recording/types.ts';

/** Runs tasks on this thread, one after the other. */
export function inlineCompute(kernels: Kernels): Compute {
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

export function prepare(
  samples: Recording['samples'],
  interval = 1,
  more: Partial<Recording> = {},
): PreparedRecord {
  return prepareRecording({ samples, interval, ...more });
}

/** A reconstruction set by hand, so that these tests do not hang on how others choose it. */
export function shape(
  record: PreparedRecord,
  delay: number,
  delaysPerChannel: number,
  window: number,
  correlation: number,
): Reconstruction {
  const { interval, channelCount } = record;
  return {
    delay: { samples: delay, time: delay * interval, method: 'set' },
    embeddingDimension: delaysPerChannel * channelCount,
    delaysPerChannel,
    theilerWindow: { samples: window, time: window * interval, method: 'set' },
    dynamics: correlation === 1 ? 'map' : 'flow',
    correlationTime: { samples: correlation, time: correlation * interval },
    vectors: 0,
    curves: {} as Reconstruction['curves'],
  };
}

export function expectFinding(answer: Answer): Finding {
  if (!answer.ok) throw new Error(`refused: ${answer.code} ${answer.why}`);
  return answer;
}

export const unknown: Answer = {
  ok: false,
  code: 'NOISE_FLOOR',
  why: 'Not estimated here.',
  remedy: 'None.',
};

export function known(value: number, spread = 0.05): Answer {
  return {
    ok: true,
    value,
    low: value * (1 - spread),
    high: value * (1 + spread),
    level: 0.9,
    unit: '',
    method: 'given',
  };
}

type Field = (s: number[]) => number[];
const LORENZ: Field = ([x, y, z]) => [10 * (y! - x!), x! * (28 - z!) - y!, x! * y! - (8 / 3) * z!];
const ROESSLER: Field = ([x, y, z]) => [-y! - z!, x! + 0.2 * y!, 0.2 + z! * (x! - 5.7)];

/** Classical Runge–Kutta; every `every` steps all variables, after 5,000 steps of transient. */
function flow(field: Field, start: number[], step: number, every: number, count: number): number[][] {
  const along = (s: number[], k: number[], h: number) => s.map((x, i) => x + h * k[i]!);
  let s = start;
  const out: number[][] = [];
  for (let i = -5000; out.length < count; i++) {
    if (i >= 0 && i % every === 0) out.push(s);
    const a = field(s);
    const b = field(along(s, a, step / 2));
    const c = field(along(s, b, step / 2));
    const d = field(along(s, c, step));
    s = s.map((x, k) => x + (step / 6) * (a[k]! + 2 * b[k]! + 2 * c[k]! + d[k]!));
  }
  return out;
}

/** Lorenz 1963 at 10, 28, 8/3, x every 0.05; std 7.9. */
export function lorenz(count: number, seed = 0): Float64Array {
  return Float64Array.from(flow(LORENZ, [1 + 0.01 * seed, 1, 20], 0.01, 5, count), (s) => s[0]!);
}

/** x and z of the same. */
export function lorenzPair(count: number, seed = 0): [Float64Array, Float64Array] {
  const states = flow(LORENZ, [1 + 0.01 * seed, 1, 20], 0.01, 5, count);
  return [Float64Array.from(states, (s) => s[0]!), Float64Array.from(states, (s) => s[2]!)];
}

/** Rössler 1976 at 0.2, 0.2, 5.7, x every 0.3; std 5. */
export function roessler(count: number, seed = 0): Float64Array {
  return Float64Array.from(flow(ROESSLER, [1 + 0.01 * seed, 1, 0], 0.05, 6, count), (s) => s[0]!);
}

/** Hénon 1976 at 1.4, 0.3. */
export function henon(count: number, seed = 0): Float64Array {
  let [x, y] = [0.1 + 0.001 * seed, 0.1];
  const out = new Float64Array(count);
  for (let i = -500; i < count; i++) {
    [x, y] = [1 - 1.4 * x * x + y, 0.3 * x];
    if (i >= 0) out[i] = x;
  }
  return out;
}

export function white(count: number, seed: number, std = 1): Float64Array {
  const random = createRandom(seed, 900);
  return Float64Array.from({ length: count }, () => std * random.normal());
}

/** x' = a·x + standard normal. */
export function autoregressive(count: number, seed: number, a: number): Float64Array {
  const noise = white(count + 500, seed);
  let x = 0;
  return noise.map((e) => (x = a * x + e)).slice(500);
}

export function plus(a: Float64Array, b: Float64Array): Float64Array {
  return a.map((x, i) => x + b[i]!);
}
