import type { QueryPoints } from '../base/kernels.ts';
import { LEAF, type Tree } from './tree.ts';

/**
 * Distances are kept squared under the Euclidean norm until the edge: they are compared as squares, whose
 * rounding tells apart what the root may not.
 */

/**
 * Distance from query `at` to one child's box. It adds the same coordinates in the same order as the point
 * distances and rounding is monotone, so it never exceeds the computed distance of a point inside.
 */
export function boxDistance(
  tree: Tree,
  euclidean: boolean,
  coordinates: Float64Array,
  at: number,
  node: number,
  side: 0 | 1,
): number {
  const { boxes, dimension: m } = tree;
  const low = (4 * node + 2 * side) * m;
  const high = low + m;
  let sum = 0;
  for (let d = 0; d < m; d++) {
    const x = coordinates[at + d]!;
    const below = boxes[low + d]! - x;
    const above = x - boxes[high + d]!;
    const out = Math.max(below, above);
    if (out > 0) {
      if (euclidean) sum += out * out;
      else if (out > sum) sum = out;
    }
  }
  return sum;
}

/** Distances of query `at` to the points of a leaf, into `out`; returns how many points it holds. */
export function leafDistances(
  tree: Tree,
  euclidean: boolean,
  coordinates: Float64Array,
  at: number,
  leaf: number,
  out: Float64Array,
): number {
  const { leaves, dimension: m, count } = tree;
  const size = Math.min(LEAF, count - leaf * LEAF);
  const base = leaf * m * LEAF;
  const first = coordinates[at]!;
  if (euclidean) {
    for (let j = 0; j < size; j++) {
      const difference = leaves[base + j]! - first;
      out[j] = difference * difference;
    }
    for (let d = 1; d < m; d++) {
      const x = coordinates[at + d]!;
      const column = base + d * LEAF;
      for (let j = 0; j < size; j++) {
        const difference = leaves[column + j]! - x;
        out[j] = out[j]! + difference * difference;
      }
    }
  } else {
    for (let j = 0; j < size; j++) out[j] = Math.abs(leaves[base + j]! - first);
    for (let d = 1; d < m; d++) {
      const x = coordinates[at + d]!;
      const column = base + d * LEAF;
      for (let j = 0; j < size; j++) {
        const difference = Math.abs(leaves[column + j]! - x);
        if (difference > out[j]!) out[j] = difference;
      }
    }
  }
  return size;
}

/**
 * The largest double `L` with √L ≤ radius, so that `squared ≤ L` decides exactly like `distance ≤ radius`
 * on the returned (rounded) distances: a radius taken from a neighbour's distance finds that neighbour.
 * The root is correctly rounded and monotone, so L lies within a few units in the last place of radius².
 */
export function squaredLimit(radius: number): number {
  let limit = radius * radius;
  // A squared distance that overflows is nowhere a neighbour.
  if (limit === Number.POSITIVE_INFINITY) return Number.MAX_VALUE;
  while (Math.sqrt(limit) > radius) limit = neighbouringDouble(limit, -1n);
  for (;;) {
    const next = neighbouringDouble(limit, 1n);
    if (next === Number.POSITIVE_INFINITY || Math.sqrt(next) > radius) return limit;
    limit = next;
  }
}

/** The double one step up or down from x ≥ 0. */
function neighbouringDouble(x: number, step: bigint): number {
  const bits = new BigInt64Array(new Float64Array([x]).buffer);
  bits[0] = bits[0]! + step;
  return new Float64Array(bits.buffer)[0]!;
}

/** Coordinates and times of indexed points, read back from their leaves. */
export function indexedPoints(tree: Tree, queries: Int32Array): QueryPoints {
  const { dimension: m, leaves, slots, times: pointTimes } = tree;
  const coordinates = new Float64Array(queries.length * m);
  const times = new Int32Array(queries.length);
  for (let q = 0, at = 0; q < queries.length; q++) {
    const slot = slots[queries[q]!]!;
    times[q] = pointTimes[slot]!;
    const base = (slot >> 5) * m * LEAF + (slot & 31);
    for (let d = 0; d < m; d++) coordinates[at++] = leaves[base + d * LEAF]!;
  }
  return { coordinates, times };
}
