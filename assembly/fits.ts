// Local fits by weighted least squares and orthonormalisation. Twin of src/fallback/fits.ts, operation by
// operation: sums run over the neighbours in order, and the SIMD build takes two target columns at a time,
// which leaves the order within each as it is.

import { gramSchmidt } from './gram-schmidt';

/** The bandwidth of tricube weights reaches just past the farthest neighbour. */
const TRICUBE_REACH: f64 = 1.0001;
/** A pivot this small beside its diagonal is rounding. */
const PIVOT_FLOOR: f64 = 1e-13;

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

// @ts-ignore: decorator
@inline
function int(p: usize, i: i32): i32 {
  return load<i32>(p + ((<usize>i) << 2));
}

/** y += a·x over `count` doubles. */
// @ts-ignore: decorator
@inline
function addScaled(y: usize, a: f64, x: usize, count: i32): void {
  let h = 0;
  if (ASC_FEATURE_SIMD) {
    const aa = f64x2.splat(a);
    for (; h + 1 < count; h += 2) {
      const o = (<usize>h) << 3;
      v128.store(y + o, f64x2.add(v128.load(y + o), f64x2.mul(aa, v128.load(x + o))));
    }
  }
  for (; h < count; h++) put(y, h, at(y, h) + a * at(x, h));
}

/** y −= a·x over `count` doubles. */
// @ts-ignore: decorator
@inline
function subtractScaled(y: usize, a: f64, x: usize, count: i32): void {
  let h = 0;
  if (ASC_FEATURE_SIMD) {
    const aa = f64x2.splat(a);
    for (; h + 1 < count; h += 2) {
      const o = (<usize>h) << 3;
      v128.store(y + o, f64x2.sub(v128.load(y + o), f64x2.mul(aa, v128.load(x + o))));
    }
  }
  for (; h < count; h++) put(y, h, at(y, h) - a * at(x, h));
}

/** y /= a over `count` doubles; zeros where a is not positive. */
// @ts-ignore: decorator
@inline
function divide(y: usize, a: f64, count: i32): void {
  let h = 0;
  if (a > 0) {
    if (ASC_FEATURE_SIMD) {
      const aa = f64x2.splat(a);
      for (; h + 1 < count; h += 2) {
        const o = (<usize>h) << 3;
        v128.store(y + o, f64x2.div(v128.load(y + o), aa));
      }
    }
    for (; h < count; h++) put(y, h, at(y, h) / a);
  } else for (; h < count; h++) put(y, h, 0);
}

/** Bytes of scratch for `localFits`. */
export function localFitsScratch(k: i32, m: i32, targets: i32): i32 {
  return 8 * (k + k * m + m + k * targets + targets + m * m + m + m * targets);
}

/**
 * Fits of `count` queries: predictions (count × targets) and, where `coefficients` is not 0, the local
 * maps (count × targets × m).
 */
export function localFits(
  data: usize,
  starts: usize,
  offsets: usize,
  m: i32,
  targetOffsets: usize,
  targets: i32,
  queries: usize,
  count: i32,
  indices: usize,
  distances: usize,
  k: i32,
  order: i32,
  tricube: i32,
  ridge: f64,
  predictions: usize,
  coefficients: usize,
  scratch: usize,
): void {
  const weight = scratch;
  const centred = weight + ((<usize>k) << 3);
  const meanPoint = centred + ((<usize>(k * m)) << 3);
  const values = meanPoint + ((<usize>m) << 3);
  const meanValue = values + ((<usize>(k * targets)) << 3);
  const moments = meanValue + ((<usize>targets) << 3);
  const diagonal = moments + ((<usize>(m * m)) << 3);
  const cross = diagonal + ((<usize>m) << 3);
  const row = (<usize>targets) << 3;

  for (let q = 0; q < count; q++) {
    const neighbours = indices + ((<usize>(q * k)) << 2);
    const away = distances + ((<usize>(q * k)) << 3);
    const query = queries + ((<usize>(q * m)) << 3);
    const out = predictions + <usize>q * row;
    let n = 0;
    while (n < k && int(neighbours, n) >= 0) n++;
    if (n == 0) {
      for (let h = 0; h < targets; h++) put(out, h, NaN);
      continue;
    }
    const farthest = at(away, n - 1);
    let total: f64 = 0;
    for (let i = 0; i < n; i++) {
      let w: f64 = 1;
      if (tricube != 0 && farthest > 0) {
        const u = at(away, i) / (farthest * TRICUBE_REACH);
        const v = 1 - u * u * u;
        w = v * v * v;
      }
      put(weight, i, w);
      total += w;
    }

    memory.fill(meanValue, 0, row);
    for (let i = 0; i < n; i++) {
      const start = data + ((<usize>int(starts, int(neighbours, i))) << 3);
      const value = values + <usize>i * row;
      for (let h = 0; h < targets; h++) put(value, h, load<f64>(start + (<usize>int(targetOffsets, h) << 3)));
      addScaled(meanValue, at(weight, i), value, targets);
    }
    divide(meanValue, total, targets);
    if (order == 0 || n < m + 2) {
      memory.copy(out, meanValue, row);
      continue;
    }

    memory.fill(meanPoint, 0, (<usize>m) << 3);
    for (let i = 0; i < n; i++) {
      const start = data + ((<usize>int(starts, int(neighbours, i))) << 3);
      const point = centred + ((<usize>(i * m)) << 3);
      const w = at(weight, i);
      for (let d = 0; d < m; d++) {
        const x = load<f64>(start + (<usize>int(offsets, d) << 3)) - at(query, d);
        put(point, d, x);
        put(meanPoint, d, at(meanPoint, d) + w * x);
      }
    }
    for (let d = 0; d < m; d++) put(meanPoint, d, at(meanPoint, d) / total);

    memory.fill(moments, 0, (<usize>(m * m)) << 3);
    memory.fill(cross, 0, (<usize>m) * row);
    for (let i = 0; i < n; i++) {
      const point = centred + ((<usize>(i * m)) << 3);
      const value = values + <usize>i * row;
      const w = at(weight, i);
      for (let d = 0; d < m; d++) put(point, d, at(point, d) - at(meanPoint, d));
      // The deviation from the mean value, once for all coordinates.
      let h = 0;
      if (ASC_FEATURE_SIMD)
        for (; h + 1 < targets; h += 2) {
          const o = (<usize>h) << 3;
          v128.store(value + o, f64x2.sub(v128.load(value + o), v128.load(meanValue + o)));
        }
      for (; h < targets; h++) put(value, h, at(value, h) - at(meanValue, h));
      for (let d = 0; d < m; d++) {
        const x = w * at(point, d);
        addScaled(moments + ((<usize>(d * m)) << 3), x, point, d + 1);
        addScaled(cross + <usize>d * row, x, value, targets);
      }
    }
    let trace: f64 = 0;
    for (let d = 0; d < m; d++) trace += at(moments, d * m + d);
    const extra = (ridge * trace) / <f64>m;
    for (let d = 0; d < m; d++) {
      put(moments, d * m + d, at(moments, d * m + d) + extra);
      put(diagonal, d, at(moments, d * m + d));
    }
    factorise(moments, diagonal, m);
    solve(moments, cross, m, targets);

    memory.copy(out, meanValue, row);
    for (let d = 0; d < m; d++) subtractScaled(out, at(meanPoint, d), cross + <usize>d * row, targets);
    if (coefficients != 0) {
      const maps = coefficients + ((<usize>(q * targets * m)) << 3);
      for (let h = 0; h < targets; h++)
        for (let d = 0; d < m; d++) put(maps, h * m + d, at(cross, d * targets + h));
    }
  }
}


/** Cholesky factor in the lower triangle, row by row. A pivot lost to rounding becomes zero. */
function factorise(a: usize, diagonal: usize, m: i32): void {
  for (let j = 0; j < m; j++) {
    for (let e = 0; e < j; e++) {
      let sum = at(a, j * m + e);
      for (let c = 0; c < e; c++) sum -= at(a, j * m + c) * at(a, e * m + c);
      const pivot = at(a, e * m + e);
      put(a, j * m + e, pivot > 0 ? sum / pivot : 0);
    }
    let sum = at(a, j * m + j);
    for (let c = 0; c < j; c++) sum -= at(a, j * m + c) * at(a, j * m + c);
    put(a, j * m + j, sum > PIVOT_FLOOR * at(diagonal, j) ? sqrt(sum) : 0);
  }
}

/** Solves L Lᵀ X = B in place for all columns of the row-major m × columns matrix B. */
function solve(l: usize, b: usize, m: i32, columns: i32): void {
  const row = (<usize>columns) << 3;
  for (let j = 0; j < m; j++) {
    for (let c = 0; c < j; c++) subtractScaled(b + <usize>j * row, at(l, j * m + c), b + <usize>c * row, columns);
    divide(b + <usize>j * row, at(l, j * m + j), columns);
  }
  for (let j = m - 1; j >= 0; j--) {
    for (let c = j + 1; c < m; c++) subtractScaled(b + <usize>j * row, at(l, c * m + j), b + <usize>c * row, columns);
    divide(b + <usize>j * row, at(l, j * m + j), columns);
  }
}

/** Orthonormal columns in place; norms of the columns. dots: scratch of `columns` doubles. */
export function orthonormalise(matrix: usize, rows: i32, columns: i32, norms: usize, dots: usize): void {
  gramSchmidt(matrix, rows, columns, columns, norms, dots);
}
