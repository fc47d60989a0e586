// Vector fields with the action of their Jacobian on tangent vectors. Twin of src/fallback/fields.ts, where
// sources and parameters are named. Components are rows of `c` tangents; in the SIMD build two tangents go
// together (c is padded to even by the host), which does not change the arithmetic of any one.

import { cosine, sine } from './elementary';

// Numbers of the fields, as src/core/flow.ts sends them.
export const LORENZ = 0;
export const ROSSLER = 1;
export const HYPERCHAOTIC_ROSSLER = 2;
export const CHUA = 3;
export const UEDA = 4;
export const QUADRATIC_JERK = 5;
export const LORENZ_96 = 6;

// @ts-ignore: decorator
@inline
function at(p: usize, i: i32): f64 {
  return load<f64>(p + ((<usize>i) << 3));
}

// @ts-ignore: decorator
@inline
function put(p: usize, i: i32, x: f64): void {
  store<f64>(p + ((<usize>i) << 3), x);
}

export function derivative(field: i32, n: i32, s: usize, out: usize, p: usize): void {
  if (field == LORENZ) {
    const x = at(s, 0), y = at(s, 1), z = at(s, 2);
    put(out, 0, at(p, 0) * (y - x));
    put(out, 1, x * (at(p, 1) - z) - y);
    put(out, 2, x * y - at(p, 2) * z);
  } else if (field == ROSSLER) {
    const x = at(s, 0), y = at(s, 1), z = at(s, 2);
    put(out, 0, -y - z);
    put(out, 1, x + at(p, 0) * y);
    put(out, 2, at(p, 1) + z * (x - at(p, 2)));
  } else if (field == HYPERCHAOTIC_ROSSLER) {
    const x = at(s, 0), y = at(s, 1), z = at(s, 2), w = at(s, 3);
    put(out, 0, -y - z);
    put(out, 1, x + at(p, 0) * y + w);
    put(out, 2, at(p, 1) + x * z);
    put(out, 3, at(p, 2) * w - at(p, 3) * z);
  } else if (field == CHUA) {
    const x = at(s, 0), y = at(s, 1), z = at(s, 2);
    const f = at(p, 3) * x + 0.5 * (at(p, 2) - at(p, 3)) * (abs(x + 1) - abs(x - 1));
    put(out, 0, at(p, 0) * (y - x - f));
    put(out, 1, x - y + z);
    put(out, 2, -at(p, 1) * y);
  } else if (field == UEDA) {
    const x = at(s, 0), v = at(s, 1);
    put(out, 0, v);
    put(out, 1, at(p, 1) * cosine(at(s, 2)) - at(p, 0) * v - x * x * x);
    put(out, 2, 1);
  } else if (field == QUADRATIC_JERK) {
    const v = at(s, 1);
    put(out, 0, v);
    put(out, 1, at(s, 2));
    put(out, 2, -at(p, 0) * at(s, 2) + v * v - at(s, 0));
  } else {
    const force = at(p, 0);
    for (let i = 0; i < n; i++) {
      const next = i + 1 < n ? i + 1 : 0;
      const back = i >= 1 ? i - 1 : n - 1;
      const back2 = i >= 2 ? i - 2 : n + i - 2;
      put(out, i, (at(s, next) - at(s, back2)) * at(s, back) - at(s, i) + force);
    }
  }
}

export function divergenceOf(field: i32, n: i32, s: usize, p: usize): f64 {
  if (field == LORENZ) return -at(p, 0) - 1 - at(p, 2);
  if (field == ROSSLER) return at(p, 0) + (at(s, 0) - at(p, 2));
  if (field == HYPERCHAOTIC_ROSSLER) return at(p, 0) + at(s, 0) + at(p, 2);
  if (field == CHUA) return -at(p, 0) * (1 + (abs(at(s, 0)) < 1 ? at(p, 2) : at(p, 3))) - 1;
  if (field == UEDA || field == QUADRATIC_JERK) return -at(p, 0);
  return -(<f64>n);
}

/** One value, or two side by side in the SIMD build. */
// @ts-ignore: decorator
@inline
function both(x: f64): v128 {
  return f64x2.splat(x);
}

// @ts-ignore: decorator
@inline
function row(t: usize, i: i32, c: i32): usize {
  return t + ((<usize>(i * c)) << 3);
}

/** out = J(s) · t for the row-major n × c matrix t. */
export function tangent(field: i32, n: i32, s: usize, t: usize, out: usize, c: i32, p: usize): void {
  if (ASC_FEATURE_SIMD) tangentSimd(field, n, s, t, out, c, p);
  else tangentScalar(field, n, s, t, out, c, p);
}

function tangentScalar(field: i32, n: i32, s: usize, t: usize, out: usize, c: i32, p: usize): void {
  if (field == LORENZ_96) {
    for (let i = 0; i < n; i++) {
      const next = i + 1 < n ? i + 1 : 0;
      const back = i >= 1 ? i - 1 : n - 1;
      const back2 = i >= 2 ? i - 2 : n + i - 2;
      const b = at(s, back);
      const g = at(s, next) - at(s, back2);
      const tn = row(t, next, c), t2 = row(t, back2, c), tb = row(t, back, c), ti = row(t, i, c), o = row(out, i, c);
      for (let j = 0; j < c; j++) put(o, j, b * (at(tn, j) - at(t2, j)) + g * at(tb, j) - at(ti, j));
    }
    return;
  }
  const x = at(s, 0), y = at(s, 1), z = at(s, 2);
  const slope = abs(x) < 1 ? at(p, 2) : at(p, 3);
  const force = field == UEDA ? at(p, 1) * sine(z) : 0;
  for (let j = 0; j < c; j++) {
    const u = at(t, j), v = at(t, c + j), w = at(t, 2 * c + j);
    if (field == LORENZ) {
      put(out, j, at(p, 0) * (v - u));
      put(out, c + j, (at(p, 1) - z) * u - v - x * w);
      put(out, 2 * c + j, y * u + x * v - at(p, 2) * w);
    } else if (field == ROSSLER) {
      put(out, j, -v - w);
      put(out, c + j, u + at(p, 0) * v);
      put(out, 2 * c + j, z * u + (x - at(p, 2)) * w);
    } else if (field == HYPERCHAOTIC_ROSSLER) {
      const q = at(t, 3 * c + j);
      put(out, j, -v - w);
      put(out, c + j, u + at(p, 0) * v + q);
      put(out, 2 * c + j, z * u + x * w);
      put(out, 3 * c + j, at(p, 2) * q - at(p, 3) * w);
    } else if (field == CHUA) {
      put(out, j, at(p, 0) * (v - u - slope * u));
      put(out, c + j, u - v + w);
      put(out, 2 * c + j, -at(p, 1) * v);
    } else if (field == UEDA) {
      put(out, j, v);
      put(out, c + j, -3 * x * x * u - at(p, 0) * v - force * w);
      put(out, 2 * c + j, 0);
    } else {
      put(out, j, v);
      put(out, c + j, w);
      put(out, 2 * c + j, -at(p, 0) * w + 2 * y * v - u);
    }
  }
}

// @ts-ignore: decorator
@inline
function pair(t: usize, i: i32): v128 {
  return v128.load(t + ((<usize>i) << 3));
}

// @ts-ignore: decorator
@inline
function putPair(t: usize, i: i32, v: v128): void {
  v128.store(t + ((<usize>i) << 3), v);
}

function tangentSimd(field: i32, n: i32, s: usize, t: usize, out: usize, c: i32, p: usize): void {
  if (field == LORENZ_96) {
    for (let i = 0; i < n; i++) {
      const next = i + 1 < n ? i + 1 : 0;
      const back = i >= 1 ? i - 1 : n - 1;
      const back2 = i >= 2 ? i - 2 : n + i - 2;
      const b = both(at(s, back));
      const g = both(at(s, next) - at(s, back2));
      const tn = row(t, next, c), t2 = row(t, back2, c), tb = row(t, back, c), ti = row(t, i, c), o = row(out, i, c);
      for (let j = 0; j < c; j += 2)
        putPair(o, j, f64x2.sub(f64x2.add(f64x2.mul(b, f64x2.sub(pair(tn, j), pair(t2, j))), f64x2.mul(g, pair(tb, j))), pair(ti, j)));
    }
    return;
  }
  const x = at(s, 0), y = at(s, 1), z = at(s, 2);
  const slope = both(abs(x) < 1 ? at(p, 2) : at(p, 3));
  const force = both(field == UEDA ? at(p, 1) * sine(z) : 0);
  const p0 = both(at(p, 0));
  for (let j = 0; j < c; j += 2) {
    const u = pair(t, j), v = pair(t, c + j), w = pair(t, 2 * c + j);
    if (field == LORENZ) {
      putPair(out, j, f64x2.mul(p0, f64x2.sub(v, u)));
      putPair(out, c + j, f64x2.sub(f64x2.sub(f64x2.mul(both(at(p, 1) - z), u), v), f64x2.mul(both(x), w)));
      putPair(out, 2 * c + j, f64x2.sub(f64x2.add(f64x2.mul(both(y), u), f64x2.mul(both(x), v)), f64x2.mul(both(at(p, 2)), w)));
    } else if (field == ROSSLER) {
      putPair(out, j, f64x2.sub(f64x2.neg(v), w));
      putPair(out, c + j, f64x2.add(u, f64x2.mul(p0, v)));
      putPair(out, 2 * c + j, f64x2.add(f64x2.mul(both(z), u), f64x2.mul(both(x - at(p, 2)), w)));
    } else if (field == HYPERCHAOTIC_ROSSLER) {
      const q = pair(t, 3 * c + j);
      putPair(out, j, f64x2.sub(f64x2.neg(v), w));
      putPair(out, c + j, f64x2.add(f64x2.add(u, f64x2.mul(p0, v)), q));
      putPair(out, 2 * c + j, f64x2.add(f64x2.mul(both(z), u), f64x2.mul(both(x), w)));
      putPair(out, 3 * c + j, f64x2.sub(f64x2.mul(both(at(p, 2)), q), f64x2.mul(both(at(p, 3)), w)));
    } else if (field == CHUA) {
      putPair(out, j, f64x2.mul(p0, f64x2.sub(f64x2.sub(v, u), f64x2.mul(slope, u))));
      putPair(out, c + j, f64x2.add(f64x2.sub(u, v), w));
      putPair(out, 2 * c + j, f64x2.mul(both(-at(p, 1)), v));
    } else if (field == UEDA) {
      putPair(out, j, v);
      putPair(out, c + j, f64x2.sub(f64x2.sub(f64x2.mul(both(-3 * x * x), u), f64x2.mul(p0, v)), f64x2.mul(force, w)));
      putPair(out, 2 * c + j, both(0));
    } else {
      putPair(out, j, v);
      putPair(out, c + j, w);
      putPair(out, 2 * c + j, f64x2.sub(f64x2.add(f64x2.mul(both(-at(p, 0)), w), f64x2.mul(both(2 * y), v)), u));
    }
  }
}
