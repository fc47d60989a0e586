import type { DelayVectors } from '../base/kernels.ts';

/** Points per leaf (a power of two): two groups of 16 in the SIMD scan. Measured: 16 is no faster. */
export const LEAF = 32;

/**
 * A k-d tree (Friedman, Bentley & Finkel 1977) with tight bounding boxes. Point order is split by
 * quickselect at multiples of `LEAF`, so every leaf but the last is full and leaf `l` holds the points
 * `order[32·l … 32·l + 31]`, their coordinates copied structure-of-arrays.
 */
export interface Tree {
  readonly count: number;
  readonly dimension: number;
  /** Ordinals of the points, leaf by leaf. */
  readonly order: Int32Array;
  /** Its inverse: where in `order` each point is. */
  readonly slots: Int32Array;
  /** Start (time) of each point in leaf order. */
  readonly times: Int32Array;
  /** `[leaf][coordinate][32]`. */
  readonly leaves: Float64Array;
  /** Per inner node: boxes of left and right child, each m lows then m highs. */
  readonly boxes: Float64Array;
  /** Per inner node: left and right child; ≥ 0 an inner node, < 0 the leaf −1 − value. */
  readonly children: Int32Array;
  /** Root in the same code. */
  readonly root: number;
}

export function buildTree({ data, starts, offsets }: DelayVectors): Tree {
  const count = starts.length;
  const m = offsets.length;
  const leafCount = Math.max(1, Math.ceil(count / LEAF));
  const order = new Int32Array(count);
  for (let i = 0; i < count; i++) order[i] = i;
  const boxes = new Float64Array(Math.max(0, leafCount - 1) * 4 * m);
  const children = new Int32Array(Math.max(0, leafCount - 1) * 2);
  const box = new Float64Array(2 * m);
  let nodes = 0;

  /** Tight box of order[from … to) into `box`. */
  const measure = (from: number, to: number) => {
    for (let d = 0; d < m; d++) {
      const offset = offsets[d]!;
      let low = Number.POSITIVE_INFINITY;
      let high = Number.NEGATIVE_INFINITY;
      for (let i = from; i < to; i++) {
        const x = data[starts[order[i]!]! + offset]!;
        if (x < low) low = x;
        if (x > high) high = x;
      }
      box[d] = low;
      box[m + d] = high;
    }
  };

  /** Builds the subtree of order[from … to), whose box is in `box`; returns its code. */
  const build = (from: number, to: number): number => {
    if (to - from <= LEAF) return -1 - from / LEAF;
    let widest = 0;
    for (let d = 1; d < m; d++) if (box[m + d]! - box[d]! > box[m + widest]! - box[widest]!) widest = d;
    const leavesHere = Math.ceil((to - from) / LEAF);
    const middle = from + LEAF * (leavesHere >> 1);
    select(data, starts, offsets[widest]!, order, from, to - 1, middle);
    const node = nodes++;
    measure(from, middle);
    boxes.set(box, node * 4 * m);
    children[2 * node] = build(from, middle);
    measure(middle, to);
    boxes.set(box, node * 4 * m + 2 * m);
    children[2 * node + 1] = build(middle, to);
    return node;
  };
  measure(0, count);
  const root = build(0, count);

  const leaves = new Float64Array(leafCount * m * LEAF);
  const times = new Int32Array(count);
  const slots = new Int32Array(count);
  for (let i = 0; i < count; i++) {
    const start = starts[order[i]!]!;
    times[i] = start;
    slots[order[i]!] = i;
    const base = (i >> 5) * m * LEAF + (i & 31);
    for (let d = 0; d < m; d++) leaves[base + d * LEAF] = data[start + offsets[d]!]!;
  }
  return { count, dimension: m, order, slots, times, leaves, boxes, children, root };
}

/** Quickselect (Hoare 1961) with the median of three: afterwards no key before `k` is above one from `k` on. */
function select(
  data: Float64Array,
  starts: Int32Array,
  offset: number,
  order: Int32Array,
  from: number,
  to: number,
  k: number,
): void {
  let left = from;
  let right = to;
  while (left < right) {
    const a = data[starts[order[left]!]! + offset]!;
    const b = data[starts[order[(left + right) >> 1]!]! + offset]!;
    const c = data[starts[order[right]!]! + offset]!;
    const pivot = Math.max(Math.min(a, b), Math.min(Math.max(a, b), c));
    let i = left;
    let j = right;
    while (i <= j) {
      while (data[starts[order[i]!]! + offset]! < pivot) i++;
      while (data[starts[order[j]!]! + offset]! > pivot) j--;
      if (i > j) break;
      const swap = order[i]!;
      order[i] = order[j]!;
      order[j] = swap;
      i++;
      j--;
    }
    if (k <= j) right = j;
    else if (k >= i) left = i;
    else return;
  }
}
