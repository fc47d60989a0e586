import { createRandom } from '../../src/base/random.ts';

/** Records of known dimension and growth, made here with a plain integrator, so that tests stand alone. */

type Field = (s: readonly number[]) => number[];

/** Classical Runge–Kutta; first variable every `every` steps after `transient` steps. */
export function flow(
  field: Field,
  start: readonly number[],
  step: number,
  every: number,
  count: number,
  transient = 5000,
): Float64Array {
  const along = (s: readonly number[], k: readonly number[], h: number) => s.map((x, i) => x + h * k[i]!);
  let s = [...start];
  const out = new Float64Array(count);
  for (let i = -transient, n = 0; n < count; i++) {
    if (i >= 0 && i % every === 0) out[n++] = s[0]!;
    const a = field(s);
    const b = field(along(s, a, step / 2));
    const c = field(along(s, b, step / 2));
    const d = field(along(s, c, step));
    s = s.map((x, k) => x + (step / 6) * (a[k]! + 2 * b[k]! + 2 * c[k]! + d[k]!));
  }
  return out;
}

/** x of the Lorenz (1963) system, interval `interval` = `every` steps. */
export function lorenz(count: number, interval = 0.05, seed = 0, [sigma, rho, beta] = [10, 28, 8 / 3]) {
  const field: Field = ([x, y, z]) => [sigma! * (y! - x!), x! * (rho! - z!) - y!, x! * y! - beta! * z!];
  const every = Math.max(1, Math.round(interval / 0.01));
  return flow(field, [1 + 0.01 * seed, 1, 20], interval / every, every, count);
}

/** x of the Rössler (1976) system. */
export function roessler(count: number, interval = 0.3, seed = 0, [a, b, c] = [0.2, 0.2, 5.7]) {
  const field: Field = ([x, y, z]) => [-y! - z!, x! + a! * y!, b! + z! * (x! - c!)];
  const every = Math.max(1, Math.round(interval / 0.05));
  return flow(field, [1 + 0.01 * seed, 1, 0], interval / every, every, count);
}

export function henon(count: number, seed = 0): Float64Array {
  let [x, y] = [0.1 + 0.001 * seed, 0.1];
  const out = new Float64Array(count);
  for (let i = -500; i < count; i++) {
    [x, y] = [1 - 1.4 * x * x + y, 0.3 * x];
    if (i >= 0) out[i] = x;
  }
  return out;
}

export function logistic(count: number, r = 4, seed = 0): Float64Array {
  let x = 0.3 + 0.001 * seed;
  const out = new Float64Array(count);
  for (let i = -3000; i < count; i++) {
    x = r * x * (1 - x);
    if (i >= 0) out[i] = x;
  }
  return out;
}

/**
 * y of the map x' = 2x mod 1, y' = α·y + cos 4πx (Kaplan & Yorke 1979). The doubling map is run on random
 * bits: in floating point it would reach 0 after 53 steps.
 */
export function kaplanYorke(count: number, seed = 1, alpha = 0.2): Float64Array {
  const random = createRandom(seed, 901);
  let x = random.uniform();
  let y = 0;
  const out = new Float64Array(count);
  for (let i = -100; i < count; i++) {
    y = alpha * y + Math.cos(4 * Math.PI * x);
    x = (2 * x + random.integer(2) * 2 ** -50) % 1;
    if (i >= 0) out[i] = y;
  }
  return out;
}

/**
 * Random walk on the middle-third Cantor set, x' = (x + 2·digit)/3 with random digits: the past is a function of the
 * present point (its digits), so the delay vectors of every dimension lie on a copy of the set.
 */
export function cantor(count: number, seed = 1): Float64Array {
  const random = createRandom(seed, 902);
  let x = 0;
  const out = new Float64Array(count);
  for (let i = -40; i < count; i++) {
    x = (x + 2 * random.integer(2)) / 3;
    if (i >= 0) out[i] = x;
  }
  return out;
}

/**
 * x + 0.7·y² of the same game on the Sierpiński triangle (0,0), (1,0), (0,1): half-way to a random corner. (A linear
 * combination of x and y would be a game of its own on a line.)
 */
export function sierpinski(count: number, seed = 1): Float64Array {
  const random = createRandom(seed, 904);
  let [x, y] = [0, 0];
  const out = new Float64Array(count);
  for (let i = -60; i < count; i++) {
    const corner = random.integer(3);
    [x, y] = [(x + (corner === 1 ? 1 : 0)) / 2, (y + (corner === 2 ? 1 : 0)) / 2];
    if (i >= 0) out[i] = x + 0.7 * y * y;
  }
  return out;
}

export function white(count: number, seed: number, std = 1): Float64Array {
  const random = createRandom(seed, 900);
  return Float64Array.from({ length: count }, () => std * random.normal());
}

/** x' = a·x + standard normal. */
export function autoregressive(count: number, seed: number, a: number): Float64Array {
  const noise = white(count + 2000, seed);
  let x = 0;
  return noise.map((e) => (x = a * x + e)).slice(2000);
}

/** Noise through a resonance of `period` samples whose amplitude falls by `decay` per sample. */
export function resonance(count: number, seed: number, period: number, decay: number): Float64Array {
  const noise = white(count + 2000, seed);
  let [x, before] = [0, 0];
  const first = 2 * decay * Math.cos((2 * Math.PI) / period);
  return noise
    .map((e) => {
      [x, before] = [first * x - decay * decay * before + e, x];
      return x;
    })
    .slice(2000);
}

export function randomWalk(count: number, seed: number): Float64Array {
  let x = 0;
  return white(count, seed).map((e) => (x += e));
}

/** Noise of power spectrum f^−α with random phases, summed directly (Osborne & Provenzale 1989). */
export function coloured(count: number, seed: number, alpha: number): Float64Array {
  const random = createRandom(seed, 903);
  const out = new Float64Array(count);
  for (let k = 1; k < count / 2; k++) {
    const amplitude = k ** (-alpha / 2);
    const phase = 2 * Math.PI * random.uniform();
    // Rotation instead of a cosine per sample.
    const [c, s] = [Math.cos((2 * Math.PI * k) / count), Math.sin((2 * Math.PI * k) / count)];
    let [u, v] = [Math.cos(phase), Math.sin(phase)];
    for (let t = 0; t < count; t++) {
      out[t]! += amplitude * u;
      [u, v] = [c * u - s * v, s * u + c * v];
    }
  }
  return out;
}

export function sine(count: number, period: number): Float64Array {
  return Float64Array.from({ length: count }, (_, t) => Math.sin((2 * Math.PI * t) / period));
}

/** Two incommensurate tones. */
export function torus(count: number, period: number): Float64Array {
  const golden = (Math.sqrt(5) - 1) / 2;
  return Float64Array.from(
    { length: count },
    (_, t) => Math.sin((2 * Math.PI * t) / period) + 0.8 * Math.sin((2 * Math.PI * golden * t) / period + 1),
  );
}

export function plus(a: Float64Array, b: Float64Array, factor = 1): Float64Array {
  return a.map((x, i) => x + factor * b[i]!);
}

export function deviation(values: Float64Array): number {
  const mean = values.reduce((a, b) => a + b, 0) / values.length;
  return Math.sqrt(values.reduce((a, b) => a + (b - mean) ** 2, 0) / values.length);
}

/** Rounded to a lattice of step q. */
export function quantised(values: Float64Array, q: number): Float64Array {
  return values.map((x) => q * Math.round(x / q));
}
