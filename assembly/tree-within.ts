import { sortRow } from './select';
import {
  COLUMN, dimensionOf, LEAF, LEAF_SHIFT, leavesOf, NODE_COORDINATE, NODE_HEAD, nodesOf, orderOf, rootOf, slotsOf,
  timesOf,
} from './tree';
import { gather } from './tree-nearest';
import { boxDistance, boxLanes, distanceOf, Euclidean, firstExcluded, lastExcluded, Maximum, scanGroup } from './tree-scan';

// Scratch: 128 bytes of group distances, 64 stack entries of 4 bytes, the query's coordinates.
const STACK: usize = 128;
const QUERY: usize = STACK + 64 * 4;

/** Bytes of scratch that `treeWithin` needs. */
export function treeWithinScratch(m: i32): usize {
  return QUERY + (<usize>m << 3);
}

/**
 * All within a radius, for queries [from, queryCount), until the room of `capacity` neighbours might not do.
 * `limit` is the largest distance in the tree's own measure (squared under the Euclidean norm). Rows are written
 * from the start of `indices` (i32) and `distances` (f64); rowEnds[q] is where row q ends.
 * Room for the whole tree and one leaf more always suffices for one query.
 * @param queries ordinals, or 0 where `coordinates` (and `queryTimes`, or 0) give the points
 * @returns the first query not done
 */
export function treeWithin(
  tree: usize, maximum: i32, queries: usize, coordinates: usize, queryTimes: usize, from: i32, queryCount: i32,
  limit: f64, exclusion: i32, indices: usize, distances: usize, rowEnds: usize, capacity: i32, scratch: usize,
): i32 {
  const m = dimensionOf(tree);
  let found = 0;
  for (let q = from; q < queryCount; q++) {
    let query: usize;
    let time = 0;
    if (queries != 0) {
      const slot = load<i32>(slotsOf(tree) + (<usize>load<i32>(queries + (<usize>q << 2)) << 2));
      query = scratch + QUERY;
      gather(tree, slot, query);
      time = load<i32>(timesOf(tree) + (<usize>slot << 2));
    } else {
      query = coordinates + (<usize>q * <usize>m << 3);
      if (queryTimes != 0) time = load<i32>(queryTimes + (<usize>q << 2));
    }
    const first = firstExcluded(time, exclusion);
    const last = lastExcluded(time, exclusion);
    const end = maximum
      ? search<Maximum>(tree, m, query, limit, first, last, indices, distances, found, capacity, scratch)
      : search<Euclidean>(tree, m, query, limit, first, last, indices, distances, found, capacity, scratch);
    if (end < 0) return q;
    sortRow(indices, distances, found, end - 1);
    found = end;
    store<i32>(rowEnds + (<usize>q << 2), found);
  }
  return queryCount;
}

/** One query; returns the end of its row, −1 when there may be no room. */
function search<M>(
  tree: usize, m: i32, query: usize, limit: f64, first: i32, last: i32,
  indices: usize, distances: usize, begin: i32, capacity: i32, scratch: usize,
): i32 {
  const nodes = nodesOf(tree);
  const leaves = leavesOf(tree);
  const times = timesOf(tree);
  const order = orderOf(tree);
  const stride = NODE_HEAD + NODE_COORDINATE * <usize>m;
  let found = begin;
  let top = scratch + STACK;
  const bottom = top;
  store<i32>(top, rootOf(tree));
  top += 4;
  while (top > bottom) {
    top -= 4;
    const node = load<i32>(top);
    if (node >= 0) {
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
      store<i32>(top, load<i32>(record, 4));
      top += <usize>(right <= limit) << 2;
      store<i32>(top, load<i32>(record));
      top += <usize>(left <= limit) << 2;
      continue;
    }
    if (found + LEAF > capacity) return -1;
    const leaf = -1 - node;
    for (let group: usize = 0; group < 32; group += 16) {
      const at = ((<usize>leaf << LEAF_SHIFT) + group) << 2;
      let bits = scanGroup<M>(
        leaves + <usize>leaf * <usize>m * COLUMN + (group << 3), query, m, limit, times + at, first, last, scratch,
      );
      while (bits != 0) {
        const j = <usize>ctz(bits);
        bits &= bits - 1;
        store<i32>(indices + (<usize>found << 2), load<i32>(order + at + (j << 2)));
        store<f64>(distances + (<usize>found << 3), distanceOf<M>(load<f64>(scratch + (j << 3))));
        found++;
      }
    }
  }
  return found;
}
