// Distances of one query to the points of a leaf and to the boxes of two children.
// One point per lane and coordinates in order: the sums have the same bits on every backend.
import { COLUMN, NODE_COORDINATE, NODE_HEAD } from './tree';

/** Names of the norms for the compiler: it makes one copy of a search for each. */
export class Euclidean {}
export class Maximum {}

/** The norm's measure of one coordinate: its square, or its size. */
// @ts-ignore: decorator
@inline function firstOf<M>(x: f64): f64 {
  if (idof<M>() == idof<Euclidean>()) return x * x;
  else return Math.abs(x);
}

/** … and with a further coordinate. */
// @ts-ignore: decorator
@inline function addOf<M>(sum: f64, x: f64): f64 {
  if (idof<M>() == idof<Euclidean>()) return sum + x * x;
  else {
    const a = Math.abs(x);
    return a > sum ? a : sum;
  }
}

// @ts-ignore: decorator
@inline function firstLanes<M>(x: v128): v128 {
  if (idof<M>() == idof<Euclidean>()) return v128.mul<f64>(x, x);
  else return v128.abs<f64>(x);
}

// @ts-ignore: decorator
@inline function addLanes<M>(sum: v128, x: v128): v128 {
  if (idof<M>() == idof<Euclidean>()) return v128.add<f64>(sum, v128.mul<f64>(x, x));
  else return v128.pmax<f64>(sum, v128.abs<f64>(x));
}

/** From the measure kept inside the tree to the distance. */
// @ts-ignore: decorator
@inline export function distanceOf<M>(measure: f64): f64 {
  if (idof<M>() == idof<Euclidean>()) return Math.sqrt(measure);
  else return measure;
}

/** First and last start excluded around `time`; a start s is admissible when s < first or s > last. */
// @ts-ignore: decorator
@inline export function firstExcluded(time: i32, exclusion: i32): i32 {
  const t = <i64>time - <i64>exclusion;
  return t < <i64>i32.MIN_VALUE ? i32.MIN_VALUE : t > <i64>i32.MAX_VALUE ? i32.MAX_VALUE : <i32>t;
}
// @ts-ignore: decorator
@inline export function lastExcluded(time: i32, exclusion: i32): i32 {
  const t = <i64>time + <i64>exclusion;
  return t < <i64>i32.MIN_VALUE ? i32.MIN_VALUE : t > <i64>i32.MAX_VALUE ? i32.MAX_VALUE : <i32>t;
}

/**
 * Distances of the query to 16 points of a leaf (`points`: their first coordinates) into `out`, and as bits
 * those at most `bound` and admissible. `out` is written only when a bit is set.
 */
// @ts-ignore: decorator
@inline export function scanGroup<M>(
  points: usize, query: usize, m: i32, bound: f64, times: usize, first: i32, last: i32, out: usize,
): i32 {
  if (ASC_FEATURE_SIMD) {
    let x = v128.load64_splat(query);
    let a0 = firstLanes<M>(v128.sub<f64>(v128.load(points), x));
    let a1 = firstLanes<M>(v128.sub<f64>(v128.load(points, 16), x));
    let a2 = firstLanes<M>(v128.sub<f64>(v128.load(points, 32), x));
    let a3 = firstLanes<M>(v128.sub<f64>(v128.load(points, 48), x));
    let a4 = firstLanes<M>(v128.sub<f64>(v128.load(points, 64), x));
    let a5 = firstLanes<M>(v128.sub<f64>(v128.load(points, 80), x));
    let a6 = firstLanes<M>(v128.sub<f64>(v128.load(points, 96), x));
    let a7 = firstLanes<M>(v128.sub<f64>(v128.load(points, 112), x));
    const end = query + (<usize>m << 3);
    for (let q = query + 8, p = points + COLUMN; q < end; q += 8, p += COLUMN) {
      x = v128.load64_splat(q);
      a0 = addLanes<M>(a0, v128.sub<f64>(v128.load(p), x));
      a1 = addLanes<M>(a1, v128.sub<f64>(v128.load(p, 16), x));
      a2 = addLanes<M>(a2, v128.sub<f64>(v128.load(p, 32), x));
      a3 = addLanes<M>(a3, v128.sub<f64>(v128.load(p, 48), x));
      a4 = addLanes<M>(a4, v128.sub<f64>(v128.load(p, 64), x));
      a5 = addLanes<M>(a5, v128.sub<f64>(v128.load(p, 80), x));
      a6 = addLanes<M>(a6, v128.sub<f64>(v128.load(p, 96), x));
      a7 = addLanes<M>(a7, v128.sub<f64>(v128.load(p, 112), x));
    }
    // Masks of 64-bit lanes packed to 32, 16, 8 bits: one movemask for the whole group.
    const limit = v128.splat<f64>(bound);
    const low = v128.splat<i32>(first);
    const high = v128.splat<i32>(last);
    const b0 = v128.and(pack(v128.le<f64>(a0, limit), v128.le<f64>(a1, limit)), admissible(times, low, high));
    const b1 = v128.and(pack(v128.le<f64>(a2, limit), v128.le<f64>(a3, limit)), admissible(times + 16, low, high));
    const b2 = v128.and(pack(v128.le<f64>(a4, limit), v128.le<f64>(a5, limit)), admissible(times + 32, low, high));
    const b3 = v128.and(pack(v128.le<f64>(a6, limit), v128.le<f64>(a7, limit)), admissible(times + 48, low, high));
    const bits = i8x16.bitmask(
      v128.narrow<i16>(v128.narrow<i32>(b0, b1), v128.narrow<i32>(b2, b3)),
    );
    if (bits != 0) {
      v128.store(out, a0);
      v128.store(out, a1, 16);
      v128.store(out, a2, 32);
      v128.store(out, a3, 48);
      v128.store(out, a4, 64);
      v128.store(out, a5, 80);
      v128.store(out, a6, 96);
      v128.store(out, a7, 112);
    }
    return bits;
  } else {
    let bits = 0;
    const end = query + (<usize>m << 3);
    for (let j = 0; j < 16; j += 4) {
      let p = points + (<usize>j << 3);
      let x = load<f64>(query);
      let a0 = firstOf<M>(load<f64>(p) - x);
      let a1 = firstOf<M>(load<f64>(p, 8) - x);
      let a2 = firstOf<M>(load<f64>(p, 16) - x);
      let a3 = firstOf<M>(load<f64>(p, 24) - x);
      for (let q = query + 8; q < end; q += 8) {
        p += COLUMN;
        x = load<f64>(q);
        a0 = addOf<M>(a0, load<f64>(p) - x);
        a1 = addOf<M>(a1, load<f64>(p, 8) - x);
        a2 = addOf<M>(a2, load<f64>(p, 16) - x);
        a3 = addOf<M>(a3, load<f64>(p, 24) - x);
      }
      const o = out + (<usize>j << 3);
      store<f64>(o, a0);
      store<f64>(o, a1, 8);
      store<f64>(o, a2, 16);
      store<f64>(o, a3, 24);
      const t = times + (<usize>j << 2);
      bits |= (i32(a0 <= bound) & allowed(load<i32>(t), first, last)) << j;
      bits |= (i32(a1 <= bound) & allowed(load<i32>(t, 4), first, last)) << (j + 1);
      bits |= (i32(a2 <= bound) & allowed(load<i32>(t, 8), first, last)) << (j + 2);
      bits |= (i32(a3 <= bound) & allowed(load<i32>(t, 12), first, last)) << (j + 3);
    }
    return bits;
  }
}

// @ts-ignore: decorator
@inline function pack(a: v128, b: v128): v128 {
  return v128.shuffle<i32>(a, b, 0, 2, 4, 6);
}

// @ts-ignore: decorator
@inline function admissible(times: usize, first: v128, last: v128): v128 {
  const t = v128.load(times);
  return v128.or(v128.lt<i32>(t, first), v128.gt<i32>(t, last));
}

// @ts-ignore: decorator
@inline function allowed(time: i32, first: i32, last: i32): i32 {
  return i32(time < first) | i32(time > last);
}

/** Distances to the boxes of the left and right child, in the lower and upper lane. */
// @ts-ignore: decorator
@inline export function boxLanes<M>(record: usize, query: usize, m: i32): v128 {
  let sum = v128.splat<f64>(0);
  const zero = v128.splat<f64>(0);
  const end = query + (<usize>m << 3);
  for (let q = query, p = record + NODE_HEAD; q < end; q += 8, p += NODE_COORDINATE) {
    const x = v128.load64_splat(q);
    const below = v128.sub<f64>(v128.load(p), x);
    const above = v128.sub<f64>(x, v128.load(p, 16));
    sum = addLanes<M>(sum, v128.pmax<f64>(v128.pmax<f64>(below, above), zero));
  }
  return sum;
}

/** The same for one child without SIMD; `side` is 0 or 8 bytes. */
// @ts-ignore: decorator
@inline export function boxDistance<M>(record: usize, query: usize, m: i32, side: usize): f64 {
  let sum: f64 = 0;
  const end = query + (<usize>m << 3);
  for (let q = query, p = record + NODE_HEAD + side; q < end; q += 8, p += NODE_COORDINATE) {
    const x = load<f64>(q);
    const below = load<f64>(p) - x;
    const above = x - load<f64>(p, 16);
    const out = below > above ? below : above;
    if (out > 0) sum = addOf<M>(sum, out);
  }
  return sum;
}
