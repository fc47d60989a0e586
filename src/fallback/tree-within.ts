import type { QueryPoints, RadiusNeighbours } from '../base/kernels.ts';
import { LEAF, type Tree } from './tree.ts';
import { boxDistance, leafDistances, squaredLimit } from './tree-distances.ts';

/** All admissible points within a radius of every query, ascending indices within a row. */
export function searchWithin(
  tree: Tree,
  euclidean: boolean,
  { coordinates, times }: QueryPoints,
  radius: number,
  exclusion: number,
): RadiusNeighbours {
  const { dimension: m, count, children, root, order, times: pointTimes } = tree;
  const stack = new Int32Array(64);
  const leafScratch = new Float64Array(LEAF);
  const limit = euclidean ? squaredLimit(radius) : radius;
  const queries = coordinates.length / m;
  const rowStarts = new Int32Array(queries + 1);
  let indices = new Int32Array(Math.max(16, queries * 8));
  let distances = new Float64Array(indices.length);
  let found = 0;
  for (let q = 0; q < queries; q++) {
    const at = q * m;
    const time = times ? times[q]! : 0;
    let depth = count > 0 ? 1 : 0;
    stack[0] = root;
    while (depth > 0) {
      let node = stack[--depth]!;
      while (node >= 0) {
        const left = boxDistance(tree, euclidean, coordinates, at, node, 0) <= limit;
        const right = boxDistance(tree, euclidean, coordinates, at, node, 1) <= limit;
        if (!left && !right) break;
        if (left && right) stack[depth++] = children[2 * node + 1]!;
        node = children[2 * node + (left ? 0 : 1)]!;
      }
      if (node >= 0) continue;
      const leaf = -1 - node;
      const size = leafDistances(tree, euclidean, coordinates, at, leaf, leafScratch);
      if (found + size > indices.length) {
        indices = enlarged(indices, new Int32Array(2 * (found + size)));
        distances = enlarged(distances, new Float64Array(2 * (found + size)));
      }
      for (let j = 0; j < size; j++) {
        if (leafScratch[j]! > limit) continue;
        const slot = leaf * LEAF + j;
        if (exclusion >= 0 && Math.abs(pointTimes[slot]! - time) <= exclusion) continue;
        indices[found] = order[slot]!;
        distances[found] = euclidean ? Math.sqrt(leafScratch[j]!) : leafScratch[j]!;
        found++;
      }
    }
    sortRow(indices, distances, rowStarts[q]!, found - 1);
    rowStarts[q + 1] = found;
  }
  return { rowStarts, indices: indices.slice(0, found), distances: distances.slice(0, found) };
}

function enlarged<T extends Int32Array | Float64Array>(from: T, to: T): T {
  to.set(from);
  return to;
}

/**
 * Sorts one row by index, distances carried along: quicksort (Hoare 1961) with the median of three down to
 * short pieces, then insertion. Indices are distinct. Recursion takes the shorter side: at most 31 levels.
 */
function sortRow(indices: Int32Array, distances: Float64Array, from: number, to: number): void {
  let left = from;
  let right = to;
  while (right - left > 16) {
    const a = indices[left]!;
    const b = indices[(left + right) >> 1]!;
    const c = indices[right]!;
    const pivot = Math.max(Math.min(a, b), Math.min(Math.max(a, b), c));
    let i = left;
    let j = right;
    while (i <= j) {
      while (indices[i]! < pivot) i++;
      while (indices[j]! > pivot) j--;
      if (i > j) break;
      const index = indices[i]!;
      indices[i] = indices[j]!;
      indices[j] = index;
      const distance = distances[i]!;
      distances[i] = distances[j]!;
      distances[j] = distance;
      i++;
      j--;
    }
    if (j - left < right - i) {
      sortRow(indices, distances, left, j);
      left = i;
    } else {
      sortRow(indices, distances, i, right);
      right = j;
    }
  }
  for (let i = left + 1; i <= right; i++) {
    const index = indices[i]!;
    const distance = distances[i]!;
    let p = i;
    while (p > left && indices[p - 1]! > index) {
      indices[p] = indices[p - 1]!;
      distances[p] = distances[p - 1]!;
      p--;
    }
    indices[p] = index;
    distances[p] = distance;
  }
}
