/** Bits of a digit: 2,048 counters fit the first-level cache. Six digits cover 64 bits. */
const DIGIT = 11;
const RADIX = 1 << DIGIT;
const DIGITS = 6;

/**
 * Stable argsort of doubles of a fixed length by radix on their bits, least digit first (Knuth, TAOCP 3,
 * 5.2.5): equal values keep the order of their indices, −0 equals +0. Digits shared by all are skipped.
 */
export function argsort(n: number): (values: Float64Array, order: Int32Array) => void {
  const keys = new Float64Array(n);
  const words = new Uint32Array(keys.buffer);
  const littleEndian = new Uint8Array(Uint16Array.of(1).buffer)[0] === 1;
  const [low, high] = littleEndian ? [0, 1] : [1, 0];
  const spare = new Int32Array(n);
  const counts = new Int32Array(DIGITS * RADIX);

  const digit = (i: number, d: number): number => {
    const lo = words[2 * i + low]!;
    const hi = words[2 * i + high]!;
    switch (d) {
      case 0:
        return lo & 2047;
      case 1:
        return (lo >>> 11) & 2047;
      case 2:
        return (lo >>> 22) | ((hi & 1) << 10);
      case 3:
        return (hi >>> 1) & 2047;
      case 4:
        return (hi >>> 12) & 2047;
      default:
        return hi >>> 23;
    }
  };

  return (values, order) => {
    counts.fill(0);
    for (let i = 0; i < n; i++) {
      keys[i] = values[i]! + 0;
      // Order of the bits as unsigned integers = order of the values: flip the sign, or all for negatives.
      if (words[2 * i + high]! >>> 31) {
        words[2 * i + high] = ~words[2 * i + high]!;
        words[2 * i + low] = ~words[2 * i + low]!;
      } else words[2 * i + high] = words[2 * i + high]! | 0x80000000;
      for (let d = 0; d < DIGITS; d++) counts[d * RADIX + digit(i, d)]!++;
      order[i] = i;
    }
    let from: Int32Array = order;
    let to: Int32Array = spare;
    for (let d = 0; d < DIGITS; d++) {
      const base = d * RADIX;
      let position = 0;
      let shared = false;
      for (let r = 0; r < RADIX; r++) {
        const count = counts[base + r]!;
        if (count === n) shared = true;
        counts[base + r] = position;
        position += count;
      }
      if (shared) continue;
      for (let i = 0; i < n; i++) {
        const index = from[i]!;
        const r = base + digit(index, d);
        to[counts[r]!] = index;
        counts[r]!++;
      }
      [from, to] = [to, from];
    }
    if (from !== order) order.set(from);
  };
}
