import { cos, sin } from '../base/elementary.ts';
import type { HalfSpectrum, Surrogate, SurrogateInput } from '../base/kernels.ts';
import { argsort } from './argsort.ts';

/** Interleaved complex numbers: re, im, re, im, … */
type Complex = Float64Array;

/** Tables of one length, made once per transform family. */
export interface FourierPlan {
  /** Length of the real series. */
  readonly length: number;
  /** Length of the complex transform: half for even lengths, the same for odd ones. */
  readonly complexLength: number;
  /** Radices of the complex transform, in order. */
  readonly factors: Int32Array;
  /** exp(−2πi k / complexLength), interleaved. */
  readonly twiddles: Complex;
  /** exp(−2πi k / length) for k ≤ length/4 … complexLength, to join the halves of an even real transform. */
  readonly joining: Complex;
}

/** Factors of 2^a·3^b·5^c, fours first; undefined for other lengths. */
export function fourierFactors(length: number): Int32Array | undefined {
  const factors: number[] = [];
  let rest = length;
  for (const radix of [4, 2, 3, 5])
    while (rest % radix === 0 && rest > 1) {
      factors.push(radix);
      rest /= radix;
    }
  return rest === 1 ? Int32Array.from(factors) : undefined;
}

export function fourierPlan(length: number): FourierPlan {
  const complexLength = length % 2 === 0 ? length / 2 : length;
  return {
    length,
    complexLength,
    factors: fourierFactors(complexLength)!,
    twiddles: roots(complexLength, complexLength),
    joining: roots(length, length % 2 === 0 ? complexLength + 1 : 1),
  };
}

/** exp(−2πi k / n) for k = 0 … count − 1, the angle folded into one octant so that symmetry is exact. */
function roots(n: number, count: number): Complex {
  const out = new Float64Array(2 * count);
  for (let k = 0; k < count; k++) {
    // Eighths of a turn, in units of turn / (8n): exact integers.
    const eighth = Math.floor((8 * k) / n);
    const even = eighth + (eighth & 1);
    // Offset from the nearest quarter or half-quarter boundary that is a multiple of a quarter turn.
    const quarter = (even >> 1) & 3;
    const angle = (2 * Math.PI * (4 * k - (even >> 1) * n)) / (4 * n);
    const c = cos(angle);
    const s = sin(angle);
    const [re, im] = quarter === 0 ? [c, s] : quarter === 1 ? [-s, c] : quarter === 2 ? [-c, -s] : [s, -c];
    out[2 * k] = re;
    out[2 * k + 1] = -im;
  }
  return out;
}

const SIN_60 = Math.sqrt(3) / 2;
// cos and sin of 72° and 144°, from √5: exact radicals rounded once.
const COS_72 = (Math.sqrt(5) - 1) / 4;
const COS_144 = -(Math.sqrt(5) + 1) / 4;
const SIN_72 = Math.sqrt(10 + 2 * Math.sqrt(5)) / 4;
const SIN_144 = Math.sqrt(10 - 2 * Math.sqrt(5)) / 4;

/**
 * Complex transform by Stockham's self-sorting scheme, decimation in frequency (Cochran et al. 1967, Proc.
 * IEEE 55, 1664), radices 4, 2, 3, 5. Leaves the result in `a` or `b` and returns that one.
 */
export function transform(a: Complex, b: Complex, plan: FourierPlan): Complex {
  const { factors, twiddles, complexLength } = plan;
  let from = a;
  let to = b;
  let length = complexLength;
  let stride = 1;
  for (const radix of factors) {
    const m = length / radix;
    pass(radix, from, to, m, stride, twiddles);
    length = m;
    stride *= radix;
    [from, to] = [to, from];
  }
  return from;
}

function pass(radix: number, x: Complex, y: Complex, m: number, s: number, w: Complex): void {
  const gap = 2 * s * m;
  for (let q = 0; q < m; q++) {
    const w1 = 2 * q * s;
    for (let k = 0; k < s; k++) {
      const i = 2 * (k + s * q);
      const o = 2 * (k + s * radix * q);
      if (radix === 4) butterfly4(x, y, i, gap, o, 2 * s, w, w1);
      else if (radix === 2) butterfly2(x, y, i, gap, o, 2 * s, w, w1);
      else if (radix === 3) butterfly3(x, y, i, gap, o, 2 * s, w, w1);
      else butterfly5(x, y, i, gap, o, 2 * s, w, w1);
    }
  }
}

/** y[o] = (re + i·im) · w[at]. */
function turn(y: Complex, o: number, re: number, im: number, w: Complex, at: number): void {
  const c = w[at]!;
  const s = w[at + 1]!;
  y[o] = re * c - im * s;
  y[o + 1] = im * c + re * s;
}

function butterfly2(
  x: Complex,
  y: Complex,
  i: number,
  gap: number,
  o: number,
  step: number,
  w: Complex,
  w1: number,
): void {
  const ar = x[i]!,
    ai = x[i + 1]!;
  const br = x[i + gap]!,
    bi = x[i + gap + 1]!;
  y[o] = ar + br;
  y[o + 1] = ai + bi;
  turn(y, o + step, ar - br, ai - bi, w, w1);
}

function butterfly4(
  x: Complex,
  y: Complex,
  i: number,
  gap: number,
  o: number,
  step: number,
  w: Complex,
  w1: number,
): void {
  const ar = x[i]!,
    ai = x[i + 1]!;
  const br = x[i + gap]!,
    bi = x[i + gap + 1]!;
  const cr = x[i + 2 * gap]!,
    ci = x[i + 2 * gap + 1]!;
  const dr = x[i + 3 * gap]!,
    di = x[i + 3 * gap + 1]!;
  const acr = ar + cr,
    aci = ai + ci,
    amr = ar - cr,
    ami = ai - ci;
  const bdr = br + dr,
    bdi = bi + di,
    bmr = br - dr,
    bmi = bi - di;
  y[o] = acr + bdr;
  y[o + 1] = aci + bdi;
  turn(y, o + step, amr + bmi, ami - bmr, w, w1);
  turn(y, o + 2 * step, acr - bdr, aci - bdi, w, 2 * w1);
  turn(y, o + 3 * step, amr - bmi, ami + bmr, w, 3 * w1);
}

function butterfly3(
  x: Complex,
  y: Complex,
  i: number,
  gap: number,
  o: number,
  step: number,
  w: Complex,
  w1: number,
): void {
  const ar = x[i]!,
    ai = x[i + 1]!;
  const br = x[i + gap]!,
    bi = x[i + gap + 1]!;
  const cr = x[i + 2 * gap]!,
    ci = x[i + 2 * gap + 1]!;
  const sr = br + cr,
    si = bi + ci;
  const tr = ar - 0.5 * sr,
    ti = ai - 0.5 * si;
  const ur = SIN_60 * (bi - ci),
    ui = SIN_60 * (cr - br);
  y[o] = ar + sr;
  y[o + 1] = ai + si;
  turn(y, o + step, tr + ur, ti + ui, w, w1);
  turn(y, o + 2 * step, tr - ur, ti - ui, w, 2 * w1);
}

function butterfly5(
  x: Complex,
  y: Complex,
  i: number,
  gap: number,
  o: number,
  step: number,
  w: Complex,
  w1: number,
): void {
  const ar = x[i]!,
    ai = x[i + 1]!;
  const br = x[i + gap]!,
    bi = x[i + gap + 1]!;
  const cr = x[i + 2 * gap]!,
    ci = x[i + 2 * gap + 1]!;
  const dr = x[i + 3 * gap]!,
    di = x[i + 3 * gap + 1]!;
  const er = x[i + 4 * gap]!,
    ei = x[i + 4 * gap + 1]!;
  const p1r = br + er,
    p1i = bi + ei,
    m1r = br - er,
    m1i = bi - ei;
  const p2r = cr + dr,
    p2i = ci + di,
    m2r = cr - dr,
    m2i = ci - di;
  y[o] = ar + (p1r + p2r);
  y[o + 1] = ai + (p1i + p2i);
  const t1r = ar + (COS_72 * p1r + COS_144 * p2r),
    t1i = ai + (COS_72 * p1i + COS_144 * p2i);
  const t2r = ar + (COS_144 * p1r + COS_72 * p2r),
    t2i = ai + (COS_144 * p1i + COS_72 * p2i);
  const u1r = SIN_72 * m1i + SIN_144 * m2i,
    u1i = SIN_72 * m1r + SIN_144 * m2r;
  const u2r = SIN_144 * m1i - SIN_72 * m2i,
    u2i = SIN_144 * m1r - SIN_72 * m2r;
  turn(y, o + step, t1r + u1r, t1i - u1i, w, w1);
  turn(y, o + 2 * step, t2r + u2r, t2i - u2i, w, 2 * w1);
  turn(y, o + 3 * step, t2r - u2r, t2i + u2i, w, 3 * w1);
  turn(y, o + 4 * step, t1r - u1r, t1i + u1i, w, 4 * w1);
}

/** Work space and tables of repeated real transforms of one length. */
export class RealFourier {
  readonly plan: FourierPlan;
  readonly #a: Complex;
  readonly #b: Complex;

  constructor(length: number) {
    this.plan = fourierPlan(length);
    this.#a = new Float64Array(2 * this.plan.complexLength);
    this.#b = new Float64Array(2 * this.plan.complexLength);
  }

  /** Interleaved half spectrum, bins 0 … ⌊n/2⌋, into `out`. */
  forward(series: Float64Array, out: Complex): void {
    const { length, complexLength, joining } = this.plan;
    const a = this.#a;
    if (length % 2 === 1) {
      for (let t = 0; t < length; t++) {
        a[2 * t] = series[t]!;
        a[2 * t + 1] = 0;
      }
      const z = transform(a, this.#b, this.plan);
      for (let k = 0; k < out.length; k++) out[k] = z[k]!;
      return;
    }
    a.set(series);
    const z = transform(a, this.#b, this.plan);
    const half = complexLength;
    for (let k = 0; k <= half; k++) {
      const i = k === half ? 0 : 2 * k;
      const j = k === 0 ? 0 : 2 * (half - k);
      const sr = z[i]! + z[j]!,
        si = z[i + 1]! - z[j + 1]!;
      const dr = z[i]! - z[j]!,
        di = z[i + 1]! + z[j + 1]!;
      const c = joining[2 * k]!,
        s = joining[2 * k + 1]!;
      out[2 * k] = 0.5 * (sr + (c * di + s * dr));
      out[2 * k + 1] = 0.5 * (si - (c * dr - s * di));
    }
  }

  /** Its inverse, with the factor 1/n, into `series`. */
  inverse(spectrum: Complex, series: Float64Array): void {
    const { length, complexLength, joining } = this.plan;
    const a = this.#a;
    const scale = 1 / complexLength;
    if (length % 2 === 1) {
      // conj(X) of the full spectrum: its transform is conj of the inverse's, and the series is real.
      for (let k = 0; k < length; k++) {
        const mirrored = k > length - k;
        const i = 2 * (mirrored ? length - k : k);
        a[2 * k] = spectrum[i]!;
        a[2 * k + 1] = k === 0 ? 0 : mirrored ? spectrum[i + 1]! : -spectrum[i + 1]!;
      }
      const z = transform(a, this.#b, this.plan);
      for (let t = 0; t < length; t++) series[t] = z[2 * t]! * scale;
      return;
    }
    const half = complexLength;
    for (let k = 0; k < half; k++) {
      const i = 2 * k;
      const j = 2 * (half - k);
      // The imaginary parts of the first and last bin are zero for a real series.
      const xi = k === 0 ? 0 : spectrum[i + 1]!;
      const xj = k === 0 ? 0 : spectrum[j + 1]!;
      const sr = spectrum[i]! + spectrum[j]!,
        si = xi - xj;
      const dr = spectrum[i]! - spectrum[j]!,
        di = xi + xj;
      const c = joining[2 * k]!,
        s = joining[2 * k + 1]!;
      // Z = ½(S + i·conj(w)·D), stored conjugated.
      a[i] = 0.5 * (sr - (c * di - s * dr));
      a[i + 1] = -(0.5 * (si + (c * dr + s * di)));
    }
    const z = transform(a, this.#b, this.plan);
    for (let t = 0; t < half; t++) {
      series[2 * t] = z[2 * t]! * scale;
      series[2 * t + 1] = -z[2 * t + 1]! * scale;
    }
  }
}

export function realSpectrum(series: Float64Array): HalfSpectrum {
  const bins = (series.length >> 1) + 1;
  const out = new Float64Array(2 * bins);
  new RealFourier(series.length).forward(series, out);
  return {
    real: Float64Array.from({ length: bins }, (_, k) => out[2 * k]!),
    imaginary: Float64Array.from({ length: bins }, (_, k) => out[2 * k + 1]!),
  };
}

export function realSeries({ real, imaginary }: HalfSpectrum, length: number): Float64Array {
  const spectrum = new Float64Array(2 * real.length);
  for (let k = 0; k < real.length; k++) {
    spectrum[2 * k] = real[k]!;
    spectrum[2 * k + 1] = imaginary[k]!;
  }
  const series = new Float64Array(length);
  new RealFourier(length).inverse(spectrum, series);
  return series;
}

export function surrogate({ values, permutation, iterations }: SurrogateInput): Surrogate {
  const n = values.length;
  const fourier = new RealFourier(n);
  let mean = 0;
  for (let t = 0; t < n; t++) mean += values[t]!;
  mean /= n;
  const centred = values.map((v) => v - mean);

  const target = new Float64Array(2 * ((n >> 1) + 1));
  fourier.forward(centred, target);
  const amplitudes = new Float64Array(target.length / 2);
  for (let k = 0; k < amplitudes.length; k++)
    amplitudes[k] = Math.sqrt(target[2 * k]! * target[2 * k]! + target[2 * k + 1]! * target[2 * k + 1]!);

  const sorter = argsort(n);
  const order = new Int32Array(n);
  sorter(centred, order);
  const sorted = Float64Array.from(order, (i) => values[i]!);
  const sortedCentred = Float64Array.from(order, (i) => centred[i]!);

  // The rank of each sample now; the shuffle is the first.
  const ranks = new Int32Array(n);
  const series = new Float64Array(n);
  const spectrum = target;
  for (let t = 0; t < n; t++) {
    ranks[t] = permutation[t]!;
    series[t] = sortedCentred[permutation[t]!]!;
  }
  let done = 0;
  let converged = false;
  while (done < iterations && !converged) {
    fourier.forward(series, spectrum);
    for (let k = 0; k < amplitudes.length; k++) {
      const re = spectrum[2 * k]!;
      const im = spectrum[2 * k + 1]!;
      const size = Math.sqrt(re * re + im * im);
      if (size > 0) {
        const factor = amplitudes[k]! / size;
        spectrum[2 * k] = re * factor;
        spectrum[2 * k + 1] = im * factor;
      } else {
        spectrum[2 * k] = amplitudes[k]!;
        spectrum[2 * k + 1] = 0;
      }
    }
    fourier.inverse(spectrum, series);
    sorter(series, order);
    converged = true;
    for (let r = 0; r < n; r++) {
      const t = order[r]!;
      if (ranks[t] !== r) {
        ranks[t] = r;
        converged = false;
      }
      series[t] = sortedCentred[r]!;
    }
    done++;
  }
  return { values: Float64Array.from(ranks, (r) => sorted[r]!), ranks, iterations: done, converged };
}
