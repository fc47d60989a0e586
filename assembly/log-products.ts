/**
 * Sums of logarithms as running products, mantissa and exponent apart: one logarithm a (block, step), which the
 * host takes. Moving a power of two from a product to its exponent is exact, so the bits of the mantissa depend
 * on the order of the factors alone. Twin of the class of this name in src/fallback/divergence.ts.
 *
 * Sums of one block: `width` bytes (steps + 1 doubles, rounded up to even) of products, then as many of i64
 * exponents and of i64 counts of zero factors. `ends[s]` counts the rows of factors that end with step s.
 */

const HIGH: f64 = 1.157920892373162e77; // 2^256
const LOW: f64 = 8.636168555094445e-78; // 2^-256

/** Bytes of so many doubles. */
// @ts-ignore: decorator
@inline
export function shift(samples: i32): usize {
  return <usize>samples << 3;
}

/** Element of an i32 array. */
// @ts-ignore: decorator
@inline
export function at(array: usize, i: i32): i32 {
  return load<i32>(array + (<usize>i << 2));
}

// @ts-ignore: decorator
@inline
export function countEnd(ends: usize, length: i32): void {
  const cell = ends + (<usize>length << 2);
  store<i32>(cell, load<i32>(cell) + 1);
}

/** Bytes of one part of the sums. */
// @ts-ignore: decorator
@inline
export function evenWidth(steps: i32): usize {
  return <usize>((steps + 2) & ~1) << 3;
}

/** Bytes of the end counts, in whole vectors. */
// @ts-ignore: decorator
@inline
export function endsBytes(steps: i32): usize {
  return (<usize>(steps + 4) & ~3) << 2;
}

export function clear(sums: usize, width: usize, ends: usize, steps: i32): void {
  memory.fill(sums + width, 0, 2 * width);
  memory.fill(ends, 0, endsBytes(steps));
  for (let i: usize = 0; i < width; i += 8) store<f64>(sums + i, 1);
}

/** Out of a block's sums. `ends[s]`: how many of its `all` factors end with step s; the rest go on. */
export function results(sums: usize, width: usize, ends: usize, all: i32, steps: i32, out: usize, part: usize): void {
  let followed = <i64>all;
  for (let s = 0; s <= steps; s++, sums += 8, out += 8) {
    store<f64>(out, load<f64>(sums));
    store<f64>(out + part, <f64>load<i64>(sums + width));
    store<f64>(out + 2 * part, <f64>(followed - load<i64>(sums + 2 * width)));
    followed -= <i64>at(ends, s);
  }
}

/**
 * Two steps of four pairs, in the order of the pairs. Factors are at most 16 · offsets (data below 2), so a product
 * that has left LOW … HIGH in the middle is still outside after the fourth, where it is noticed.
 */
// @ts-ignore: decorator
@inline
export function multiply4(f0: v128, f1: v128, f2: v128, f3: v128, sums: usize, width: usize): void {
  const none = f64x2.splat(0);
  const one = f64x2.splat(1);
  const z0 = f64x2.eq(f0, none);
  const z1 = f64x2.eq(f1, none);
  const z2 = f64x2.eq(f2, none);
  const z3 = f64x2.eq(f3, none);
  // A zero factor becomes one, without a branch: quantised records have many.
  const product = f64x2.mul(
    f64x2.mul(
      f64x2.mul(
        f64x2.mul(v128.load(sums), v128.or(f0, v128.and(z0, one))),
        v128.or(f1, v128.and(z1, one)),
      ),
      v128.or(f2, v128.and(z2, one)),
    ),
    v128.or(f3, v128.and(z3, one)),
  );
  if (inRange(product)) {
    v128.store(sums, product);
    const zeros = sums + 2 * width;
    v128.store(zeros, i64x2.sub(v128.load(zeros), i64x2.add(i64x2.add(z0, z1), i64x2.add(z2, z3))));
  } else {
    multiply2(f0, sums, width);
    multiply2(f1, sums, width);
    multiply2(f2, sums, width);
    multiply2(f3, sums, width);
  }
}

/** Two steps of one pair, each on its own: a product has left the range, or a factor is zero. */
function multiply2(factor: v128, sums: usize, width: usize): void {
  multiply(f64x2.extract_lane(factor, 0), sums, width);
  multiply(f64x2.extract_lane(factor, 1), sums + 8, width);
}

// @ts-ignore: decorator
@inline
function inRange(product: v128): bool {
  return v128.all_true<i64>(
    v128.and(f64x2.ge(product, f64x2.splat(LOW)), f64x2.lt(product, f64x2.splat(HIGH))),
  );
}

/** Multiplies by row[from … length] of one pair; `from` is even. */
export function multiplyRow(row: usize, from: i32, length: i32, sums: usize, width: usize): void {
  sums += shift(from);
  row += shift(from);
  let s = from;
  if (ASC_FEATURE_SIMD) {
    for (; s < length; s += 2, sums += 16, row += 16) {
      const factor = v128.load(row);
      const product = f64x2.mul(v128.load(sums), factor);
      if (inRange(product)) v128.store(sums, product);
      else multiply2(factor, sums, width);
    }
  }
  for (; s <= length; s++, sums += 8, row += 8) multiply(load<f64>(row), sums, width);
}

/** One factor, at the address of its product. */
function multiply(factor: f64, sums: usize, width: usize): void {
  let product = load<f64>(sums) * factor;
  if (product >= LOW && product < HIGH) {
    store<f64>(sums, product);
    return;
  }
  if (factor == 0) {
    const zeros = sums + 2 * width;
    store<i64>(zeros, load<i64>(zeros) + 1);
    return;
  }
  let exponent = load<i64>(sums + width);
  for (; factor < LOW; factor *= HIGH) exponent -= 256;
  product = load<f64>(sums) * factor;
  for (; product < LOW; product *= HIGH) exponent -= 256;
  for (; product >= HIGH; product *= LOW) exponent += 256;
  store<f64>(sums, product);
  store<i64>(sums + width, exponent);
}

