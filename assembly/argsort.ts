// Stable argsort of doubles by radix on their bits (Knuth, TAOCP 3, 5.2.5): six digits of 11 bits, least
// first, digits shared by all skipped. Equal values keep the order of their indices, −0 equals +0.

const DIGIT = 11;
const RADIX = 1 << DIGIT;
const DIGITS = 6;

/** Bytes of scratch for n values: keys, spare order, counters. */
export function argsortScratch(n: i32): i32 {
  return n * 8 + n * 4 + DIGITS * RADIX * 4 + 16;
}

/** Order of the n doubles at `values` into the i32 array `order`. */
export function argsort(values: usize, n: i32, order: usize, scratch: usize): void {
  const keys = scratch;
  const counts = keys + ((<usize>n) << 3);
  const spare = counts + DIGITS * RADIX * 4;
  memory.fill(counts, 0, DIGITS * RADIX * 4);
  for (let i = 0; i < n; i++) {
    // Order of the bits as unsigned integers = order of the values: flip the sign, or all for negatives.
    const bits = reinterpret<u64>(load<f64>(values + ((<usize>i) << 3)) + 0);
    const key = bits ^ (<u64>(<i64>bits >> 63) | 0x8000000000000000);
    store<u64>(keys + ((<usize>i) << 3), key);
    store<i32>(order + ((<usize>i) << 2), i);
    for (let d = 0; d < DIGITS; d++) {
      const c = counts + ((<usize>((d << DIGIT) + <i32>((key >> <u64>(d * DIGIT)) & (RADIX - 1)))) << 2);
      store<i32>(c, load<i32>(c) + 1);
    }
  }
  let from = order;
  let to = spare;
  for (let d = 0; d < DIGITS; d++) {
    const base = counts + ((<usize>(d << DIGIT)) << 2);
    let position = 0;
    let shared = false;
    for (let r = 0; r < RADIX; r++) {
      const c = base + ((<usize>r) << 2);
      const count = load<i32>(c);
      if (count == n) shared = true;
      store<i32>(c, position);
      position += count;
    }
    if (shared) continue;
    const shift = <u64>(d * DIGIT);
    for (let i = 0; i < n; i++) {
      const index = load<i32>(from + ((<usize>i) << 2));
      const r = <i32>((load<u64>(keys + ((<usize>index) << 3)) >> shift) & (RADIX - 1));
      const c = base + ((<usize>r) << 2);
      const slot = load<i32>(c);
      store<i32>(to + ((<usize>slot) << 2), index);
      store<i32>(c, slot + 1);
    }
    const swap = from;
    from = to;
    to = swap;
  }
  if (from != order) memory.copy(order, from, (<usize>n) << 2);
}
