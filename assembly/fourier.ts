// Fourier transforms and the iterative amplitude-adjusted surrogate. Twin of src/fallback/fourier.ts, which
// also makes the tables: factors (i32), twiddles and joining roots (interleaved complex).

import { argsort } from './argsort';
import * as scalar from './butterflies-scalar';
import * as simd from './butterflies-simd';

/** Complex Stockham transform of a (scratch b); returns the one that holds the result. */
function transform(a: usize, b: usize, length: i32, factors: usize, factorCount: i32, twiddles: usize): usize {
  let from = a;
  let to = b;
  let rest = length;
  let stride = 1;
  for (let f = 0; f < factorCount; f++) {
    const radix = load<i32>(factors + ((<usize>f) << 2));
    const m = rest / radix;
    if (ASC_FEATURE_SIMD) {
      if (radix == 4) simd.pass4(from, to, m, stride, twiddles);
      else if (radix == 2) simd.pass2(from, to, m, stride, twiddles);
      else if (radix == 3) simd.pass3(from, to, m, stride, twiddles);
      else simd.pass5(from, to, m, stride, twiddles);
    } else {
      if (radix == 4) scalar.pass4(from, to, m, stride, twiddles);
      else if (radix == 2) scalar.pass2(from, to, m, stride, twiddles);
      else if (radix == 3) scalar.pass3(from, to, m, stride, twiddles);
      else scalar.pass5(from, to, m, stride, twiddles);
    }
    rest = m;
    stride *= radix;
    const swap = from;
    from = to;
    to = swap;
  }
  return from;
}

/** Interleaved half spectrum of a real series of length n. a, b: scratch of the complex length. */
export function realForward(
  series: usize,
  n: i32,
  out: usize,
  a: usize,
  b: usize,
  factors: usize,
  factorCount: i32,
  twiddles: usize,
  joining: usize,
): void {
  if (n & 1) {
    for (let t = 0; t < n; t++) {
      store<f64>(a + ((<usize>t) << 4), load<f64>(series + ((<usize>t) << 3)));
      store<f64>(a + ((<usize>t) << 4), 0, 8);
    }
    const z = transform(a, b, n, factors, factorCount, twiddles);
    memory.copy(out, z, (<usize>((n >> 1) + 1)) << 4);
    return;
  }
  memory.copy(a, series, (<usize>n) << 3);
  const half = n >> 1;
  const z = transform(a, b, half, factors, factorCount, twiddles);
  for (let k = 0; k <= half; k++) {
    const i = z + ((<usize>(k == half ? 0 : k)) << 4);
    const j = z + ((<usize>(k == 0 ? 0 : half - k)) << 4);
    const zr = load<f64>(i), zi = load<f64>(i, 8);
    const yr = load<f64>(j), yi = load<f64>(j, 8);
    const sr = zr + yr, si = zi - yi;
    const dr = zr - yr, di = zi + yi;
    const w = joining + ((<usize>k) << 4);
    const c = load<f64>(w), s = load<f64>(w, 8);
    const o = out + ((<usize>k) << 4);
    store<f64>(o, 0.5 * (sr + (c * di + s * dr)));
    store<f64>(o, 0.5 * (si - (c * dr - s * di)), 8);
  }
}

/** Real series of length n from its interleaved half spectrum, with the factor 1/n. */
export function realInverse(
  spectrum: usize,
  n: i32,
  series: usize,
  a: usize,
  b: usize,
  factors: usize,
  factorCount: i32,
  twiddles: usize,
  joining: usize,
): void {
  if (n & 1) {
    for (let k = 0; k < n; k++) {
      const mirrored = k > n - k;
      const i = spectrum + ((<usize>(mirrored ? n - k : k)) << 4);
      const imaginary = load<f64>(i, 8);
      store<f64>(a + ((<usize>k) << 4), load<f64>(i));
      store<f64>(a + ((<usize>k) << 4), k == 0 ? 0 : mirrored ? imaginary : -imaginary, 8);
    }
    const z = transform(a, b, n, factors, factorCount, twiddles);
    const scale = 1 / <f64>n;
    for (let t = 0; t < n; t++) store<f64>(series + ((<usize>t) << 3), load<f64>(z + ((<usize>t) << 4)) * scale);
    return;
  }
  const half = n >> 1;
  for (let k = 0; k < half; k++) {
    const i = spectrum + ((<usize>k) << 4);
    const j = spectrum + ((<usize>(half - k)) << 4);
    const xi = k == 0 ? 0 : load<f64>(i, 8);
    const xj = k == 0 ? 0 : load<f64>(j, 8);
    const sr = load<f64>(i) + load<f64>(j), si = xi - xj;
    const dr = load<f64>(i) - load<f64>(j), di = xi + xj;
    const w = joining + ((<usize>k) << 4);
    const c = load<f64>(w), s = load<f64>(w, 8);
    const o = a + ((<usize>k) << 4);
    store<f64>(o, 0.5 * (sr - (c * di - s * dr)));
    store<f64>(o, -(0.5 * (si + (c * dr + s * di))), 8);
  }
  const z = transform(a, b, half, factors, factorCount, twiddles);
  const scale = 1 / <f64>half;
  for (let t = 0; t < half; t++) {
    const o = series + ((<usize>t) << 4);
    store<f64>(o, load<f64>(z + ((<usize>t) << 4)) * scale);
    store<f64>(o, -load<f64>(z + ((<usize>t) << 4), 8) * scale, 8);
  }
}

/** Amplitudes of an interleaved half spectrum. */
function amplitudesOf(spectrum: usize, bins: i32, out: usize): void {
  for (let k = 0; k < bins; k++) {
    const re = load<f64>(spectrum + ((<usize>k) << 4));
    const im = load<f64>(spectrum + ((<usize>k) << 4), 8);
    store<f64>(out + ((<usize>k) << 3), sqrt(re * re + im * im));
  }
}

/**
 * Iterates the surrogate. `values` are the record's; on return `ranks` (i32) hold the rank of each sample,
 * so that the surrogate is sorted[ranks[t]], and `order` is free. Returns iterations·2 + (1 if converged).
 * Scratch: centred, series, sortedCentred (n doubles each), spectrum (n/2 + 1 complex), amplitudes, a, b,
 * sort scratch.
 */
export function surrogateRanks(
  values: usize,
  permutation: usize,
  n: i32,
  iterations: i32,
  ranks: usize,
  order: usize,
  sortedOrder: usize,
  centred: usize,
  series: usize,
  sortedCentred: usize,
  spectrum: usize,
  amplitudes: usize,
  a: usize,
  b: usize,
  sortScratch: usize,
  factors: usize,
  factorCount: i32,
  twiddles: usize,
  joining: usize,
): i32 {
  const bins = (n >> 1) + 1;
  let mean: f64 = 0;
  for (let t = 0; t < n; t++) mean += load<f64>(values + ((<usize>t) << 3));
  mean /= <f64>n;
  for (let t = 0; t < n; t++) store<f64>(centred + ((<usize>t) << 3), load<f64>(values + ((<usize>t) << 3)) - mean);
  realForward(centred, n, spectrum, a, b, factors, factorCount, twiddles, joining);
  amplitudesOf(spectrum, bins, amplitudes);
  argsort(centred, n, sortedOrder, sortScratch);
  for (let r = 0; r < n; r++)
    store<f64>(
      sortedCentred + ((<usize>r) << 3),
      load<f64>(centred + ((<usize>load<i32>(sortedOrder + ((<usize>r) << 2))) << 3)),
    );
  for (let t = 0; t < n; t++) {
    const r = load<i32>(permutation + ((<usize>t) << 2));
    store<i32>(ranks + ((<usize>t) << 2), r);
    store<f64>(series + ((<usize>t) << 3), load<f64>(sortedCentred + ((<usize>r) << 3)));
  }
  let done = 0;
  let converged = false;
  while (done < iterations && !converged) {
    realForward(series, n, spectrum, a, b, factors, factorCount, twiddles, joining);
    for (let k = 0; k < bins; k++) {
      const bin = spectrum + ((<usize>k) << 4);
      const re = load<f64>(bin);
      const im = load<f64>(bin, 8);
      const size = sqrt(re * re + im * im);
      const amplitude = load<f64>(amplitudes + ((<usize>k) << 3));
      if (size > 0) {
        const factor = amplitude / size;
        store<f64>(bin, re * factor);
        store<f64>(bin, im * factor, 8);
      } else {
        store<f64>(bin, amplitude);
        store<f64>(bin, 0, 8);
      }
    }
    realInverse(spectrum, n, series, a, b, factors, factorCount, twiddles, joining);
    argsort(series, n, order, sortScratch);
    converged = true;
    for (let r = 0; r < n; r++) {
      const t = load<i32>(order + ((<usize>r) << 2));
      const rank = ranks + ((<usize>t) << 2);
      if (load<i32>(rank) != r) {
        store<i32>(rank, r);
        converged = false;
      }
      store<f64>(series + ((<usize>t) << 3), load<f64>(sortedCentred + ((<usize>r) << 3)));
    }
    done++;
  }
  return done * 2 + (converged ? 1 : 0);
}
