// Radix passes of the Stockham transform with one v128 per complex number. Twin of the scalar passes and of
// src/fallback/fourier.ts, operation by operation: a − b·s is written a + b·(−s), which has the same bits.

import { COS_72, COS_144, SIN_60, SIN_72, SIN_144 } from './fourier-constants';

// @ts-ignore: decorator
@inline
function at(x: usize, i: i32): v128 {
  return v128.load(x + ((<usize>i) << 4));
}

// @ts-ignore: decorator
@inline
function swapped(v: v128): v128 {
  return i64x2.shuffle(v, v, 1, 0);
}

/** v · w for w = c + i·s given as (c, c) and (−s, s). */
// @ts-ignore: decorator
@inline
function turned(v: v128, cosine: v128, sine: v128): v128 {
  return f64x2.add(f64x2.mul(v, cosine), f64x2.mul(swapped(v), sine));
}

// @ts-ignore: decorator
@inline
function cosineOf(w: usize, i: i32): v128 {
  return v128.load64_splat(w + ((<usize>i) << 4));
}

// @ts-ignore: decorator
@inline
function sineOf(w: usize, i: i32): v128 {
  return f64x2.mul(v128.load64_splat(w + ((<usize>i) << 4) + 8), f64x2(-1, 1));
}

/** −i·v = (im, −re). */
// @ts-ignore: decorator
@inline
function clockwise(v: v128): v128 {
  return f64x2.mul(swapped(v), f64x2(1, -1));
}

export function pass2(x: usize, y: usize, m: i32, s: i32, w: usize): void {
  for (let q = 0; q < m; q++) {
    const c1 = cosineOf(w, q * s);
    const s1 = sineOf(w, q * s);
    for (let k = 0; k < s; k++) {
      const a = at(x, k + s * q);
      const b = at(x, k + s * (q + m));
      const o = y + ((<usize>(k + s * 2 * q)) << 4);
      v128.store(o, f64x2.add(a, b));
      v128.store(o + ((<usize>s) << 4), turned(f64x2.sub(a, b), c1, s1));
    }
  }
}

export function pass4(x: usize, y: usize, m: i32, s: i32, w: usize): void {
  const step = (<usize>s) << 4;
  for (let q = 0; q < m; q++) {
    const c1 = cosineOf(w, q * s);
    const s1 = sineOf(w, q * s);
    const c2 = cosineOf(w, 2 * q * s);
    const s2 = sineOf(w, 2 * q * s);
    const c3 = cosineOf(w, 3 * q * s);
    const s3 = sineOf(w, 3 * q * s);
    for (let k = 0; k < s; k++) {
      const a = at(x, k + s * q);
      const b = at(x, k + s * (q + m));
      const c = at(x, k + s * (q + 2 * m));
      const d = at(x, k + s * (q + 3 * m));
      const ac = f64x2.add(a, c);
      const am = f64x2.sub(a, c);
      const bd = f64x2.add(b, d);
      const bm = clockwise(f64x2.sub(b, d));
      const o = y + ((<usize>(k + s * 4 * q)) << 4);
      v128.store(o, f64x2.add(ac, bd));
      v128.store(o + step, turned(f64x2.add(am, bm), c1, s1));
      v128.store(o + 2 * step, turned(f64x2.sub(ac, bd), c2, s2));
      v128.store(o + 3 * step, turned(f64x2.sub(am, bm), c3, s3));
    }
  }
}

export function pass3(x: usize, y: usize, m: i32, s: i32, w: usize): void {
  const step = (<usize>s) << 4;
  for (let q = 0; q < m; q++) {
    const c1 = cosineOf(w, q * s);
    const s1 = sineOf(w, q * s);
    const c2 = cosineOf(w, 2 * q * s);
    const s2 = sineOf(w, 2 * q * s);
    for (let k = 0; k < s; k++) {
      const a = at(x, k + s * q);
      const b = at(x, k + s * (q + m));
      const c = at(x, k + s * (q + 2 * m));
      const sum = f64x2.add(b, c);
      const t = f64x2.sub(a, f64x2.mul(f64x2.splat(0.5), sum));
      const u = f64x2.mul(f64x2.splat(SIN_60), clockwise(f64x2.sub(b, c)));
      const o = y + ((<usize>(k + s * 3 * q)) << 4);
      v128.store(o, f64x2.add(a, sum));
      v128.store(o + step, turned(f64x2.add(t, u), c1, s1));
      v128.store(o + 2 * step, turned(f64x2.sub(t, u), c2, s2));
    }
  }
}

export function pass5(x: usize, y: usize, m: i32, s: i32, w: usize): void {
  const step = (<usize>s) << 4;
  for (let q = 0; q < m; q++)
    for (let k = 0; k < s; k++) {
      const a = at(x, k + s * q);
      const b = at(x, k + s * (q + m));
      const c = at(x, k + s * (q + 2 * m));
      const d = at(x, k + s * (q + 3 * m));
      const e = at(x, k + s * (q + 4 * m));
      const p1 = f64x2.add(b, e);
      const m1 = f64x2.sub(b, e);
      const p2 = f64x2.add(c, d);
      const m2 = f64x2.sub(c, d);
      const t1 = f64x2.add(a, f64x2.add(f64x2.mul(f64x2.splat(COS_72), p1), f64x2.mul(f64x2.splat(COS_144), p2)));
      const t2 = f64x2.add(a, f64x2.add(f64x2.mul(f64x2.splat(COS_144), p1), f64x2.mul(f64x2.splat(COS_72), p2)));
      const u1 = clockwise(f64x2.add(f64x2.mul(f64x2.splat(SIN_72), m1), f64x2.mul(f64x2.splat(SIN_144), m2)));
      const u2 = clockwise(f64x2.sub(f64x2.mul(f64x2.splat(SIN_144), m1), f64x2.mul(f64x2.splat(SIN_72), m2)));
      const o = y + ((<usize>(k + s * 5 * q)) << 4);
      v128.store(o, f64x2.add(a, f64x2.add(p1, p2)));
      v128.store(o + step, turned(f64x2.add(t1, u1), cosineOf(w, q * s), sineOf(w, q * s)));
      v128.store(o + 2 * step, turned(f64x2.add(t2, u2), cosineOf(w, 2 * q * s), sineOf(w, 2 * q * s)));
      v128.store(o + 3 * step, turned(f64x2.sub(t2, u2), cosineOf(w, 3 * q * s), sineOf(w, 3 * q * s)));
      v128.store(o + 4 * step, turned(f64x2.sub(t1, u1), cosineOf(w, 4 * q * s), sineOf(w, 4 * q * s)));
    }
}
