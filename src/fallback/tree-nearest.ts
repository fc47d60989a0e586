import type { NearestNeighbours, QueryPoints } from '../base/kernels.ts';
import { LEAF, type Tree } from './tree.ts';
import { boxDistance, leafDistances } from './tree-distances.ts';

/**
 * The k nearest admissible points of every query: depth first, nearer child first, insertion into a sorted
 * list. The result is fully defined by (distance, smaller index), so the order of the walk is free.
 */
export function searchNearest(
  tree: Tree,
  euclidean: boolean,
  { coordinates, times }: QueryPoints,
  k: number,
  exclusion: number,
): NearestNeighbours {
  const { dimension: m, count, children, root, order, times: pointTimes } = tree;
  // One entry a level; the tree halves its leaves, so 64 levels hold more than any memory.
  const stack = new Int32Array(64);
  const bounds = new Float64Array(64);
  const leafScratch = new Float64Array(LEAF);
  const queries = coordinates.length / m;
  const indices = new Int32Array(queries * k).fill(-1);
  const distances = new Float64Array(queries * k).fill(Number.POSITIVE_INFINITY);
  for (let q = 0; q < queries; q++) {
    const at = q * m;
    const time = times ? times[q]! : 0;
    const row = q * k;
    const last = row + k - 1;
    let depth = count > 0 ? 1 : 0;
    stack[0] = root;
    bounds[0] = 0;
    while (depth > 0) {
      depth--;
      // An equal bound is visited too: the leaf may hold a point as near with a smaller index.
      if (bounds[depth]! > distances[last]!) continue;
      let node = stack[depth]!;
      while (node >= 0) {
        const left = boxDistance(tree, euclidean, coordinates, at, node, 0);
        const right = boxDistance(tree, euclidean, coordinates, at, node, 1);
        const far = left <= right ? 1 : 0;
        stack[depth] = children[2 * node + far]!;
        bounds[depth] = far === 1 ? right : left;
        depth++;
        node = children[2 * node + 1 - far]!;
      }
      const leaf = -1 - node;
      const size = leafDistances(tree, euclidean, coordinates, at, leaf, leafScratch);
      for (let j = 0; j < size; j++) {
        const distance = leafScratch[j]!;
        if (distance > distances[last]!) continue;
        const slot = leaf * LEAF + j;
        if (exclusion >= 0 && Math.abs(pointTimes[slot]! - time) <= exclusion) continue;
        const index = order[slot]!;
        if (distance === distances[last]! && indices[last]! < index) continue;
        let p = last;
        while (
          p > row &&
          (distances[p - 1]! > distance || (distances[p - 1]! === distance && indices[p - 1]! > index))
        ) {
          distances[p] = distances[p - 1]!;
          indices[p] = indices[p - 1]!;
          p--;
        }
        distances[p] = distance;
        indices[p] = index;
      }
    }
  }
  if (euclidean) for (let i = 0; i < distances.length; i++) distances[i] = Math.sqrt(distances[i]!);
  return { k, indices, distances };
}
