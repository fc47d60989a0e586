// Classical Runge–Kutta steps of a built-in field with its tangent vectors. Twin of src/fallback/flow.ts.

import { derivative, divergenceOf, tangent } from './fields';
import { gramSchmidt } from './gram-schmidt';

// @ts-ignore: decorator
@inline
function at(p: usize, i: i32): f64 {
  return load<f64>(p + ((<usize>i) << 3));
}

/** out = base + h · k, n doubles (n even in the SIMD build where `even` is set). */
// @ts-ignore: decorator
@inline
function ahead(out: usize, base: usize, h: f64, k: usize, n: i32): void {
  let i = 0;
  if (ASC_FEATURE_SIMD) {
    const hh = f64x2.splat(h);
    for (; i + 1 < n; i += 2) {
      const o = (<usize>i) << 3;
      v128.store(out + o, f64x2.add(v128.load(base + o), f64x2.mul(hh, v128.load(k + o))));
    }
  }
  for (; i < n; i++) store<f64>(out + ((<usize>i) << 3), at(base, i) + h * at(k, i));
}

/** y += sixth · (k1 + 2(k2 + k3) + k4). */
// @ts-ignore: decorator
@inline
function combine(y: usize, sixth: f64, k1: usize, k2: usize, k3: usize, k4: usize, n: i32): void {
  let i = 0;
  if (ASC_FEATURE_SIMD) {
    const s = f64x2.splat(sixth);
    const two = f64x2.splat(2);
    for (; i + 1 < n; i += 2) {
      const o = (<usize>i) << 3;
      const middle = f64x2.mul(two, f64x2.add(v128.load(k2 + o), v128.load(k3 + o)));
      const sum = f64x2.add(f64x2.add(v128.load(k1 + o), middle), v128.load(k4 + o));
      v128.store(y + o, f64x2.add(v128.load(y + o), f64x2.mul(s, sum)));
    }
  }
  for (; i < n; i++)
    store<f64>(y + ((<usize>i) << 3), at(y, i) + sixth * (at(k1, i) + 2 * (at(k2, i) + at(k3, i)) + at(k4, i)));
}

/**
 * Advances state and tangents (row-major n × width, of which `count` columns count; width even) in place.
 * norms: blocks × count; divergences: blocks. scratch: 5·n + 5·n·width + width doubles.
 */
export function advanceFlow(
  field: i32,
  n: i32,
  parameters: usize,
  state: usize,
  tangents: usize,
  count: i32,
  width: i32,
  step: f64,
  stepsPerBlock: i32,
  blocks: i32,
  norms: usize,
  divergences: usize,
  scratch: usize,
): void {
  const size = (<usize>n) << 3;
  const k1 = scratch, k2 = k1 + size, k3 = k2 + size, k4 = k3 + size, stage = k4 + size;
  const matrix = (<usize>(n * width)) << 3;
  const t1 = stage + size, t2 = t1 + matrix, t3 = t2 + matrix, t4 = t3 + matrix, tangentStage = t4 + matrix;
  const dots = tangentStage + matrix;
  const half = step / 2;
  const sixth = step / 6;
  const nw = n * width;
  for (let b = 0; b < blocks; b++) {
    let divergence: f64 = 0;
    for (let s = 0; s < stepsPerBlock; s++) {
      const before = divergenceOf(field, n, state, parameters);
      derivative(field, n, state, k1, parameters);
      tangent(field, n, state, tangents, t1, width, parameters);
      ahead(stage, state, half, k1, n);
      ahead(tangentStage, tangents, half, t1, nw);
      derivative(field, n, stage, k2, parameters);
      tangent(field, n, stage, tangentStage, t2, width, parameters);
      ahead(stage, state, half, k2, n);
      ahead(tangentStage, tangents, half, t2, nw);
      derivative(field, n, stage, k3, parameters);
      tangent(field, n, stage, tangentStage, t3, width, parameters);
      ahead(stage, state, step, k3, n);
      ahead(tangentStage, tangents, step, t3, nw);
      derivative(field, n, stage, k4, parameters);
      tangent(field, n, stage, tangentStage, t4, width, parameters);
      combine(state, sixth, k1, k2, k3, k4, n);
      combine(tangents, sixth, t1, t2, t3, t4, nw);
      divergence += half * (before + divergenceOf(field, n, state, parameters));
    }
    store<f64>(divergences + ((<usize>b) << 3), divergence);
    gramSchmidt(tangents, n, count, width, norms + ((<usize>(b * count)) << 3), dots);
  }
}
