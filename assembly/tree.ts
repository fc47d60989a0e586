// k-d tree (Friedman, Bentley & Finkel 1977) with tight bounding boxes; twin of src/fallback/tree.ts.
//
// Header, i32 words at `tree`, addresses filled in by the host before the build:
//   0 count   4 dimension   8 root (written by the build)   12 leaves in number
//   16 order: i32[32·leaves], ordinal of the point in each slot (−1 beyond the last point)
//   20 times: i32[32·leaves], its start
//   24 slots: i32[count], slot of each ordinal
//   28 leaves: f64[leaf][coordinate][32], +Infinity beyond the last point, so that it is never near anything
//   32 nodes: per inner node 16 bytes (left and right child as i32: ≥ 0 a node, < 0 the leaf −1 − value;
//      8 bytes unused), then per coordinate low of left, low of right, high of left, high of right
//   36 number of inner nodes given out
import { selectStarts } from './select';

/** Points per leaf, and as a shift. */
export const LEAF: i32 = 32;
export const LEAF_SHIFT: i32 = 5;
/** Bytes of one coordinate's column in a leaf. */
export const COLUMN: usize = 256;
export const NODE_HEAD: usize = 16;
export const NODE_COORDINATE: usize = 32;

// @ts-ignore: decorator
@inline export function countOf(tree: usize): i32 { return load<i32>(tree); }
// @ts-ignore: decorator
@inline export function dimensionOf(tree: usize): i32 { return load<i32>(tree, 4); }
// @ts-ignore: decorator
@inline export function rootOf(tree: usize): i32 { return load<i32>(tree, 8); }
// @ts-ignore: decorator
@inline export function leafCountOf(tree: usize): i32 { return load<i32>(tree, 12); }
// @ts-ignore: decorator
@inline export function orderOf(tree: usize): usize { return load<u32>(tree, 16); }
// @ts-ignore: decorator
@inline export function timesOf(tree: usize): usize { return load<u32>(tree, 20); }
// @ts-ignore: decorator
@inline export function slotsOf(tree: usize): usize { return load<u32>(tree, 24); }
// @ts-ignore: decorator
@inline export function leavesOf(tree: usize): usize { return load<u32>(tree, 28); }
// @ts-ignore: decorator
@inline export function nodesOf(tree: usize): usize { return load<u32>(tree, 32); }

/**
 * Builds the tree whose header the host has laid out.
 * @param ordinals scratch, i32[last start − first start + 1]: from a start back to its ordinal
 * @param box scratch, f64[2·dimension]
 */
export function treeBuild(tree: usize, data: usize, starts: usize, offsets: usize, ordinals: usize, box: usize): void {
  const count = countOf(tree);
  const m = dimensionOf(tree);
  const slotCount = leafCountOf(tree) << LEAF_SHIFT;
  const order = orderOf(tree);
  const times = timesOf(tree);
  const slots = slotsOf(tree);
  const leaves = leavesOf(tree);

  // While building, `times` holds the permuted starts: keys are then one load away from the series.
  memory.copy(times, starts, <usize>count << 2);
  measure(data, times, offsets, m, 0, count, box);
  store<i32>(tree, 0, 36);
  store<i32>(tree, split(tree, data, offsets, box, 0, count), 8);

  const first = count > 0 ? load<i32>(starts) : 0;
  for (let i = 0; i < count; i++)
    store<i32>(ordinals + (<usize>(load<i32>(starts + (<usize>i << 2)) - first) << 2), i);
  for (let slot = 0; slot < slotCount; slot++) {
    const at = <usize>slot << 2;
    let point = leaves + <usize>(slot >> LEAF_SHIFT) * <usize>m * COLUMN + (<usize>(slot & (LEAF - 1)) << 3);
    if (slot >= count) {
      store<i32>(times + at, 0);
      store<i32>(order + at, -1);
      for (let d = 0; d < m; d++, point += COLUMN) store<f64>(point, Infinity);
      continue;
    }
    const start = load<i32>(times + at);
    const ordinal = load<i32>(ordinals + (<usize>(start - first) << 2));
    store<i32>(order + at, ordinal);
    store<i32>(slots + (<usize>ordinal << 2), slot);
    for (let d = 0; d < m; d++, point += COLUMN) {
      const offset = load<i32>(offsets + (<usize>d << 2));
      store<f64>(point, load<f64>(data + (<usize>(start + offset) << 3)));
    }
  }
}

/** Splits slots [from, to), whose box is in `box`; returns the subtree. */
function split(tree: usize, data: usize, offsets: usize, box: usize, from: i32, to: i32): i32 {
  if (to - from <= LEAF) return -1 - (from >> LEAF_SHIFT);
  const m = dimensionOf(tree);
  const times = timesOf(tree);
  let widest = 0;
  let width = -1.0;
  for (let d = 0; d < m; d++) {
    const at = box + (<usize>d << 4);
    const w = load<f64>(at, 8) - load<f64>(at);
    if (w > width) {
      width = w;
      widest = d;
    }
  }
  // At a multiple of the leaf size, so that every leaf but the last is full.
  const middle = from + LEAF * ((to - from + LEAF - 1) >> (LEAF_SHIFT + 1));
  const keys = data + (<usize>load<i32>(offsets + (<usize>widest << 2)) << 3);
  selectStarts(keys, times, from, to - 1, middle);

  const node = load<i32>(tree, 36);
  store<i32>(tree, node + 1, 36);
  const record = nodesOf(tree) + <usize>node * (NODE_HEAD + NODE_COORDINATE * <usize>m);
  measure(data, times, offsets, m, from, middle, box);
  keep(record, box, m, 0);
  store<i32>(record, split(tree, data, offsets, box, from, middle));
  measure(data, times, offsets, m, middle, to, box);
  keep(record, box, m, 8);
  store<i32>(record, split(tree, data, offsets, box, middle, to), 4);
  return node;
}

/** Tight box of slots [from, to): low and high per coordinate. */
function measure(data: usize, times: usize, offsets: usize, m: i32, from: i32, to: i32, box: usize): void {
  const end = times + (<usize>to << 2);
  for (let d = 0; d < m; d++) {
    const keys = data + (<usize>load<i32>(offsets + (<usize>d << 2)) << 3);
    let low = Infinity;
    let high = -Infinity;
    for (let at = times + (<usize>from << 2); at < end; at += 4) {
      const x = load<f64>(keys + (<usize>load<i32>(at) << 3));
      low = x < low ? x : low;
      high = x > high ? x : high;
    }
    store<f64>(box + (<usize>d << 4), low);
    store<f64>(box + (<usize>d << 4), high, 8);
  }
}

/** Writes a child's box into the record of its parent; `side` is 0 or 8 bytes. */
function keep(record: usize, box: usize, m: i32, side: usize): void {
  for (let d = 0; d < m; d++) {
    const to = record + NODE_HEAD + <usize>d * NODE_COORDINATE + side;
    store<f64>(to, load<f64>(box + (<usize>d << 4)));
    store<f64>(to, load<f64>(box + (<usize>d << 4), 8), 16);
  }
}
