// Radix passes of the Stockham transform without SIMD. Twin of src/fallback/fourier.ts.

import { COS_72, COS_144, SIN_60, SIN_72, SIN_144 } from './fourier-constants';

// @ts-ignore: decorator
@inline
function re(x: usize, i: i32): f64 {
  return load<f64>(x + ((<usize>i) << 4));
}

// @ts-ignore: decorator
@inline
function im(x: usize, i: i32): f64 {
  return load<f64>(x + ((<usize>i) << 4), 8);
}

// @ts-ignore: decorator
@inline
function put(y: usize, i: i32, real: f64, imaginary: f64): void {
  const o = y + ((<usize>i) << 4);
  store<f64>(o, real);
  store<f64>(o, imaginary, 8);
}

/** y[i] = (real + i·imaginary) · w[j]. */
// @ts-ignore: decorator
@inline
function turn(y: usize, i: i32, real: f64, imaginary: f64, w: usize, j: i32): void {
  const c = re(w, j);
  const s = im(w, j);
  put(y, i, real * c - imaginary * s, imaginary * c + real * s);
}

export function pass2(x: usize, y: usize, m: i32, s: i32, w: usize): void {
  for (let q = 0; q < m; q++)
    for (let k = 0; k < s; k++) {
      const i = k + s * q;
      const j = i + s * m;
      const o = k + s * 2 * q;
      put(y, o, re(x, i) + re(x, j), im(x, i) + im(x, j));
      turn(y, o + s, re(x, i) - re(x, j), im(x, i) - im(x, j), w, q * s);
    }
}

export function pass4(x: usize, y: usize, m: i32, s: i32, w: usize): void {
  const gap = s * m;
  for (let q = 0; q < m; q++)
    for (let k = 0; k < s; k++) {
      const i = k + s * q;
      const o = k + s * 4 * q;
      const ar = re(x, i), ai = im(x, i);
      const br = re(x, i + gap), bi = im(x, i + gap);
      const cr = re(x, i + 2 * gap), ci = im(x, i + 2 * gap);
      const dr = re(x, i + 3 * gap), di = im(x, i + 3 * gap);
      const acr = ar + cr, aci = ai + ci, amr = ar - cr, ami = ai - ci;
      const bdr = br + dr, bdi = bi + di, bmr = br - dr, bmi = bi - di;
      put(y, o, acr + bdr, aci + bdi);
      turn(y, o + s, amr + bmi, ami - bmr, w, q * s);
      turn(y, o + 2 * s, acr - bdr, aci - bdi, w, 2 * q * s);
      turn(y, o + 3 * s, amr - bmi, ami + bmr, w, 3 * q * s);
    }
}

export function pass3(x: usize, y: usize, m: i32, s: i32, w: usize): void {
  const gap = s * m;
  for (let q = 0; q < m; q++)
    for (let k = 0; k < s; k++) {
      const i = k + s * q;
      const o = k + s * 3 * q;
      const ar = re(x, i), ai = im(x, i);
      const br = re(x, i + gap), bi = im(x, i + gap);
      const cr = re(x, i + 2 * gap), ci = im(x, i + 2 * gap);
      const sr = br + cr, si = bi + ci;
      const tr = ar - 0.5 * sr, ti = ai - 0.5 * si;
      const ur = SIN_60 * (bi - ci), ui = SIN_60 * (cr - br);
      put(y, o, ar + sr, ai + si);
      turn(y, o + s, tr + ur, ti + ui, w, q * s);
      turn(y, o + 2 * s, tr - ur, ti - ui, w, 2 * q * s);
    }
}

export function pass5(x: usize, y: usize, m: i32, s: i32, w: usize): void {
  const gap = s * m;
  for (let q = 0; q < m; q++)
    for (let k = 0; k < s; k++) {
      const i = k + s * q;
      const o = k + s * 5 * q;
      const ar = re(x, i), ai = im(x, i);
      const br = re(x, i + gap), bi = im(x, i + gap);
      const cr = re(x, i + 2 * gap), ci = im(x, i + 2 * gap);
      const dr = re(x, i + 3 * gap), di = im(x, i + 3 * gap);
      const er = re(x, i + 4 * gap), ei = im(x, i + 4 * gap);
      const p1r = br + er, p1i = bi + ei, m1r = br - er, m1i = bi - ei;
      const p2r = cr + dr, p2i = ci + di, m2r = cr - dr, m2i = ci - di;
      const t1r = ar + (COS_72 * p1r + COS_144 * p2r), t1i = ai + (COS_72 * p1i + COS_144 * p2i);
      const t2r = ar + (COS_144 * p1r + COS_72 * p2r), t2i = ai + (COS_144 * p1i + COS_72 * p2i);
      const u1r = SIN_72 * m1i + SIN_144 * m2i, u1i = SIN_72 * m1r + SIN_144 * m2r;
      const u2r = SIN_144 * m1i - SIN_72 * m2i, u2i = SIN_144 * m1r - SIN_72 * m2r;
      put(y, o, ar + (p1r + p2r), ai + (p1i + p2i));
      turn(y, o + s, t1r + u1r, t1i - u1i, w, q * s);
      turn(y, o + 2 * s, t2r + u2r, t2i - u2i, w, 2 * q * s);
      turn(y, o + 3 * s, t2r - u2r, t2i + u2i, w, 3 * q * s);
      turn(y, o + 4 * s, t1r - u1r, t1i + u1i, w, 4 * q * s);
    }
}
