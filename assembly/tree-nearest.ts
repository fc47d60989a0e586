import {
  COLUMN, dimensionOf, LEAF, leafCountOf, LEAF_SHIFT, leavesOf, NODE_COORDINATE, NODE_HEAD, nodesOf, orderOf,
  rootOf, slotsOf, timesOf,
} from './tree';
import { clearList, halfOf, insert } from './tree-list';
import { boxDistance, boxLanes, distanceOf, Euclidean, firstExcluded, lastExcluded, Maximum, scanGroup } from './tree-scan';

// Scratch of one search: 128 bytes of group distances, 64 stack entries of 16 bytes (bound, node), the query's
// coordinates (an even number of f64), 16 bytes with the sentinel, then the list.
const STACK: usize = 128;
const QUERY: usize = STACK + 64 * 16;

// @ts-ignore: decorator
@inline function listOf(scratch: usize, m: i32): usize {
  return scratch + QUERY + (<usize>((m + 1) & ~1) << 3) + 16;
}

/** Bytes of scratch that `treeNearest` and `treeNearestTo` need. */
export function treeNearestScratch(m: i32, k: i32): usize {
  return listOf(0, m) + 2 * halfOf(k);
}

/**
 * The k nearest of indexed points, row-major into `indices` (i32) and `distances` (f64). Queries are taken leaf
 * by leaf, so that successive ones walk the same nodes; their order does not show in the results.
 * @param heads scratch, i32[leaves]
 * @param links scratch, i32[queryCount]
 */
export function treeNearest(
  tree: usize, maximum: i32, queries: usize, queryCount: i32, k: i32, exclusion: i32,
  indices: usize, distances: usize, scratch: usize, heads: usize, links: usize,
): void {
  const slots = slotsOf(tree);
  const leafCount = leafCountOf(tree);
  memory.fill(heads, 0xff, <usize>leafCount << 2);
  for (let q = queryCount - 1; q >= 0; q--) {
    const slot = load<i32>(slots + (<usize>load<i32>(queries + (<usize>q << 2)) << 2));
    const head = heads + (<usize>(slot >> LEAF_SHIFT) << 2);
    store<i32>(links + (<usize>q << 2), load<i32>(head));
    store<i32>(head, q);
  }
  const m = dimensionOf(tree);
  const times = timesOf(tree);
  const query = scratch + QUERY;
  for (let leaf = 0; leaf < leafCount; leaf++) {
    for (let q = load<i32>(heads + (<usize>leaf << 2)); q >= 0; q = load<i32>(links + (<usize>q << 2))) {
      const slot = load<i32>(slots + (<usize>load<i32>(queries + (<usize>q << 2)) << 2));
      gather(tree, slot, query);
      const time = load<i32>(times + (<usize>slot << 2));
      const row = <usize>q * <usize>k;
      if (maximum) search<Maximum>(tree, m, query, leaf, time, k, exclusion, indices + (row << 2), distances + (row << 3), scratch);
      else search<Euclidean>(tree, m, query, leaf, time, k, exclusion, indices + (row << 2), distances + (row << 3), scratch);
    }
  }
}

/** The k nearest of points given by coordinates. `queryTimes` 0: no times, and exclusion must be −1. */
export function treeNearestTo(
  tree: usize, maximum: i32, coordinates: usize, queryTimes: usize, queryCount: i32, k: i32, exclusion: i32,
  indices: usize, distances: usize, scratch: usize,
): void {
  const m = dimensionOf(tree);
  for (let q = 0; q < queryCount; q++) {
    const query = coordinates + (<usize>q * <usize>m << 3);
    const time = queryTimes != 0 ? load<i32>(queryTimes + (<usize>q << 2)) : 0;
    const row = <usize>q * <usize>k;
    if (maximum) search<Maximum>(tree, m, query, -1, time, k, exclusion, indices + (row << 2), distances + (row << 3), scratch);
    else search<Euclidean>(tree, m, query, -1, time, k, exclusion, indices + (row << 2), distances + (row << 3), scratch);
  }
}

/** Coordinates of an indexed point out of its leaf. */
export function gather(tree: usize, slot: i32, to: usize): void {
  const m = dimensionOf(tree);
  let from = leavesOf(tree) + <usize>(slot >> LEAF_SHIFT) * <usize>m * COLUMN + (<usize>(slot & (LEAF - 1)) << 3);
  for (let d = 0; d < m; d++, from += COLUMN) store<f64>(to + (<usize>d << 3), load<f64>(from));
}

/** One query: its own leaf first (it sets a tight bound), then depth first, nearer child first. */
function search<M>(
  tree: usize, m: i32, query: usize, own: i32, time: i32, k: i32, exclusion: i32,
  indices: usize, distances: usize, scratch: usize,
): void {
  const first = firstExcluded(time, exclusion);
  const last = lastExcluded(time, exclusion);
  const list = listOf(scratch, m);
  const worst = list + (<usize>(k - 1) << 3);
  const nodes = nodesOf(tree);
  const stride = NODE_HEAD + NODE_COORDINATE * <usize>m;
  clearList(list, k);
  if (own >= 0) scanLeaf<M>(tree, m, own, query, first, last, k, list, scratch);
  let top = scratch + STACK;
  const bottom = top;
  store<f64>(top, 0);
  store<i32>(top, rootOf(tree), 8);
  top += 16;
  while (top > bottom) {
    top -= 16;
    let bound = load<f64>(worst);
    // An equal bound is visited too: the leaf may hold a point as near with a smaller ordinal.
    if (load<f64>(top) > bound) continue;
    let node = load<i32>(top, 8);
    let near: f64 = 0;
    while (node >= 0) {
      const record = nodes + <usize>node * stride;
      let left: f64;
      let right: f64;
      if (ASC_FEATURE_SIMD) {
        const both = boxLanes<M>(record, query, m);
        left = f64x2.extract_lane(both, 0);
        right = f64x2.extract_lane(both, 1);
      } else {
        left = boxDistance<M>(record, query, m, 0);
        right = boxDistance<M>(record, query, m, 8);
      }
      const far = <usize>(left <= right) << 2;
      const farther = left <= right ? right : left;
      near = left <= right ? left : right;
      store<f64>(top, farther);
      store<i32>(top, load<i32>(record + far), 8);
      top += <usize>(farther <= bound) << 4;
      node = load<i32>(record + 4 - far);
      if (near > bound) break;
    }
    if (near > bound) continue;
    const leaf = -1 - node;
    if (leaf != own) scanLeaf<M>(tree, m, leaf, query, first, last, k, list, scratch);
  }

  const half = halfOf(k);
  for (let p = 0; p < k; p++) {
    const at = list + (<usize>p << 3);
    store<f64>(distances + (<usize>p << 3), distanceOf<M>(load<f64>(at)));
    store<i32>(indices + (<usize>p << 2), <i32>load<f64>(at + half));
  }
}

// @ts-ignore: decorator
@inline function scanLeaf<M>(
  tree: usize, m: i32, leaf: i32, query: usize, first: i32, last: i32, k: i32, list: usize, scratch: usize,
): void {
  const points = leavesOf(tree) + <usize>leaf * <usize>m * COLUMN;
  const slot = <usize>leaf << LEAF_SHIFT;
  const worst = list + (<usize>(k - 1) << 3);
  for (let group: usize = 0; group < 32; group += 16) {
    const at = (slot + group) << 2;
    let bits = scanGroup<M>(
      points + (group << 3), query, m, load<f64>(worst), timesOf(tree) + at, first, last, scratch,
    );
    const order = orderOf(tree) + at;
    while (bits != 0) {
      const j = <usize>ctz(bits);
      bits &= bits - 1;
      insert(list, k, load<f64>(scratch + (j << 3)), load<i32>(order + (j << 2)));
    }
  }
}
