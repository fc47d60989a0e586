import { defineTask } from '../base/compute.ts';
import { cos, sin } from '../base/elementary.ts';
import type { Kernels } from '../base/kernels.ts';
import { createRandom } from '../base/random.ts';

export interface ZeroOneInput {
  /** Decorrelated samples: a map's iterates, or a flow's samples a correlation time apart. */
  readonly samples: Float64Array;
  readonly seed: number;
}

/** Samples used at most: the correlation is then over 200 points. */
const MOST_SAMPLES = 2_000;
/** Fewer leave fewer than 20 points to correlate. */
export const FEWEST_ZERO_ONE = 200;
/** Frequencies whose median is taken (Gottwald & Melbourne 2009 use 100; its error is then far below 0.1). */
const FREQUENCIES = 100;

/**
 * The 0–1 test for regular or irregular motion (Gottwald & Melbourne 2004, Proc. R. Soc. A 460, 603), in
 * the correlation form with the oscillating term removed (Gottwald & Melbourne 2009, SIAM J. Appl. Dyn.
 * Syst. 8, 129). Near 0: regular; near 1: irregular, chaos and noise alike. Undefined when too short.
 */
export const zeroOneTask = defineTask(
  'evidence.zero-one',
  function* (
    _kernels: Kernels,
    { samples, seed }: ZeroOneInput,
  ): Generator<number, number | undefined, void> {
    const count = Math.min(samples.length, MOST_SAMPLES);
    if (count < FEWEST_ZERO_ONE) return undefined;
    let mean = 0;
    for (let t = 0; t < count; t++) mean += samples[t]! / count;
    const leads = Math.floor(count / 10);
    const random = createRandom(seed, 51);
    const values: number[] = [];
    for (let f = 0; f < FREQUENCIES; f++) {
      // Away from 0, π and their neighbours, where resonances with the motion are likeliest.
      const c = Math.PI * (0.2 + 0.6 * random.uniform());
      values.push(growthCorrelation(samples, count, mean, leads, c));
      if (f % 4 === 3) yield f / FREQUENCIES;
    }
    values.sort((a, b) => a - b);
    return (values[(FREQUENCIES >> 1) - 1]! + values[FREQUENCIES >> 1]!) / 2;
  },
);

/** Correlation of the mean square displacement of (p, q) with the lead. */
function growthCorrelation(x: Float64Array, count: number, mean: number, leads: number, c: number): number {
  const p = new Float64Array(count);
  const q = new Float64Array(count);
  const [stepCos, stepSin] = [cos(c), sin(c)];
  let [re, im] = [stepCos, stepSin];
  let [a, b] = [0, 0];
  for (let t = 0; t < count; t++) {
    a += x[t]! * re;
    b += x[t]! * im;
    p[t] = a;
    q[t] = b;
    [re, im] = [re * stepCos - im * stepSin, re * stepSin + im * stepCos];
  }
  const origins = count - leads;
  const displacement = new Float64Array(leads);
  for (let n = 1; n <= leads; n++) {
    let sum = 0;
    for (let t = 0; t < origins; t++) {
      const dp = p[t + n]! - p[t]!;
      const dq = q[t + n]! - q[t]!;
      sum += dp * dp + dq * dq;
    }
    const oscillation = (mean * mean * (1 - cos(n * c))) / (1 - stepCos);
    displacement[n - 1] = sum / origins - oscillation;
  }
  return correlationWithOrder(displacement);
}

function correlationWithOrder(values: Float64Array): number {
  const n = values.length;
  const middle = (n - 1) / 2;
  let mean = 0;
  for (const v of values) mean += v / n;
  let [cross, own, order] = [0, 0, 0];
  for (let i = 0; i < n; i++) {
    const [u, v] = [i - middle, values[i]! - mean];
    cross += u * v;
    own += v * v;
    order += u * u;
  }
  return own > 0 ? cross / Math.sqrt(own * order) : 0;
}
