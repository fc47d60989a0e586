import type { Maker } from './processes.ts';
import { randomOf } from './processes.ts';

type Field = (s: Float64Array, out: Float64Array, t: number) => void;

/** Component 0 (or `of`) of a flow every `interval` time units (classical Runge–Kutta), start moved by the seed. */
export function flow(
  field: Field,
  start: readonly number[],
  interval: number,
  step = 0.01,
  of: (s: Float64Array) => number = (s) => s[0]!,
  transient = 100,
): Maker {
  return (count, seed) => {
    const random = randomOf(seed, 31);
    const n = start.length;
    const s = Float64Array.from(start, (v) => v + 0.1 * (random.uniform() - 0.5) * (Math.abs(v) + 0.1));
    const [a, b, c, d, moved] = [0, 1, 2, 3, 4].map(() => new Float64Array(n)) as [
      Float64Array,
      Float64Array,
      Float64Array,
      Float64Array,
      Float64Array,
    ];
    const substeps = Math.max(1, Math.ceil(interval / step - 1e-9));
    const h = interval / substeps;
    let t = 0;
    const advance = () => {
      field(s, a, t);
      for (let i = 0; i < n; i++) moved[i] = s[i]! + (h / 2) * a[i]!;
      field(moved, b, t + h / 2);
      for (let i = 0; i < n; i++) moved[i] = s[i]! + (h / 2) * b[i]!;
      field(moved, c, t + h / 2);
      for (let i = 0; i < n; i++) moved[i] = s[i]! + h * c[i]!;
      field(moved, d, t + h);
      for (let i = 0; i < n; i++) s[i] = s[i]! + (h / 6) * (a[i]! + 2 * b[i]! + 2 * c[i]! + d[i]!);
      t += h;
    };
    for (let i = 0; i < transient / h; i++) advance();
    const out = new Float64Array(count);
    for (let i = 0; i < count; i++) {
      out[i] = of(s);
      for (let k = 0; k < substeps; k++) advance();
    }
    return out;
  };
}

/** Component 0 of a map. */
export function map(
  step: (s: number[]) => number[],
  start: readonly number[],
  of: (s: readonly number[]) => number = (s) => s[0]!,
): Maker {
  return (count, seed) => {
    const random = randomOf(seed, 32);
    let s = start.map((v) => v + 0.01 * random.uniform());
    const out = new Float64Array(count);
    for (let i = -1000; i < count; i++) {
      s = step(s);
      if (i >= 0) out[i] = of(s);
    }
    return out;
  };
}

export const lorenzField =
  (r = 28): Field =>
  (s, out) => {
    out[0] = 10 * (s[1]! - s[0]!);
    out[1] = s[0]! * (r - s[2]!) - s[1]!;
    out[2] = s[0]! * s[1]! - (8 / 3) * s[2]!;
  };

export const rosslerField =
  (a = 0.2, b = 0.2, c = 5.7): Field =>
  (s, out) => {
    out[0] = -s[1]! - s[2]!;
    out[1] = s[0]! + a * s[1]!;
    out[2] = b + s[2]! * (s[0]! - c);
  };

/** x'' + k x' + x³ = B cos t (Ueda 1979). */
export const uedaField =
  (k: number, B: number): Field =>
  (s, out, t) => {
    out[0] = s[1]!;
    out[1] = B * Math.cos(t) - k * s[1]! - s[0]! * s[0]! * s[0]!;
  };

/** x''' + a x'' − x'² + x = 0 (Sprott 1997, Phys. Lett. A 228, 271). */
export const jerkField =
  (a: number): Field =>
  (s, out) => {
    out[0] = s[1]!;
    out[1] = s[2]!;
    out[2] = -a * s[2]! + s[1]! * s[1]! - s[0]!;
  };

/** Chua's circuit with the cubic characteristic (Zhong 1994, IEEE Trans. Circuits Syst. I 41, 934). */
export const chuaField: Field = (s, out) => {
  const [x, y, z] = [s[0]!, s[1]!, s[2]!];
  out[0] = 10 * (y - (x * x * x) / 16 + x / 6);
  out[1] = x - y + z;
  out[2] = -16 * y;
};

export const vanDerPolField =
  (mu: number): Field =>
  (s, out) => {
    out[0] = s[1]!;
    out[1] = mu * (1 - s[0]! * s[0]!) * s[1]! - s[0]!;
  };

/** Lorenz 1996 with n variables. */
export const lorenz96Field =
  (force: number): Field =>
  (s, out) => {
    const n = s.length;
    for (let i = 0; i < n; i++)
      out[i] = (s[(i + 1) % n]! - s[(i + n - 2) % n]!) * s[(i + n - 1) % n]! - s[i]! + force;
  };

/** Mackey & Glass 1977 by Runge–Kutta steps of 0.1 with the delayed value interpolated. */
export function mackeyGlass(delay: number, interval: number): Maker {
  return (count, seed) => {
    const random = randomOf(seed, 33);
    const h = 0.1;
    const lag = Math.round(delay / h);
    const every = Math.round(interval / h);
    const past = new Float64Array(lag + 1).fill(0.9 + 0.2 * random.uniform());
    let at = 0;
    let x = past[0]!;
    const rate = (x: number, d: number) => (0.2 * d) / (1 + d ** 10) - 0.1 * x;
    const out = new Float64Array(count);
    for (let i = -20_000; i < count * every; i++) {
      if (i >= 0 && i % every === 0) out[i / every] = x;
      const d0 = past[(at + 1) % (lag + 1)]!;
      const d1 = past[(at + 2) % (lag + 1)]!;
      const middle = 0.5 * (d0 + d1);
      const a = rate(x, d0);
      const b = rate(x + (h / 2) * a, middle);
      const c = rate(x + (h / 2) * b, middle);
      const d = rate(x + h * c, d1);
      x += (h / 6) * (a + 2 * b + 2 * c + d);
      at = (at + 1) % (lag + 1);
      past[at] = x;
    }
    return out;
  };
}

/** Sum of tones; each [period in samples, amplitude]; phases from the seed. */
export function tones(list: readonly (readonly [number, number])[]): Maker {
  return (count, seed) => {
    const random = randomOf(seed, 34);
    const phases = list.map(() => 2 * Math.PI * random.uniform());
    return Float64Array.from({ length: count }, (_, i) =>
      list.reduce((s, [period, a], k) => s + a * Math.cos((2 * Math.PI * i) / period + phases[k]!), 0),
    );
  };
}

/** Adds white noise of `share` standard deviations. */
export function withNoise(base: Maker, share: number): Maker {
  if (share === 0) return base;
  return (count, seed) => {
    const x = base(count, seed);
    const mean = x.reduce((s, v) => s + v, 0) / count;
    const std = Math.sqrt(x.reduce((s, v) => s + (v - mean) ** 2, 0) / count);
    const random = randomOf(seed, 35);
    return x.map((v) => v + share * std * random.normal());
  };
}

/** Rounds to 2^bits steps over the range. */
export function quantised(base: Maker, bits: number): Maker {
  return (count, seed) => {
    const x = base(count, seed);
    const low = Math.min(...x);
    const step = (Math.max(...x) - low) / (2 ** bits - 1);
    return x.map((v) => low + step * Math.round((v - low) / step));
  };
}

/** First half of one, second half of another. */
export function switched(a: Maker, b: Maker): Maker {
  return (count, seed) => {
    const half = count >> 1;
    const out = new Float64Array(count);
    out.set(a(half, seed));
    out.set(b(count - half, seed + 1), half);
    return out;
  };
}
