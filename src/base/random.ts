/**
 * Seeded random numbers. xoshiro128** 1.1 (Blackman & Vigna 2021, ACM Trans. Math. Softw. 47, 36), its
 * 32-bit sister of xoshiro256**: JavaScript has no fast 64-bit integers, and this code runs on every
 * backend. The state is filled by splitmix32 steps, so small seeds do not start near zero.
 */
export interface Random {
  /** Uniform on [0, 1), 53 bits. */
  uniform(): number;
  /** Uniform integer 0 … bound − 1, without modulo bias (rejection); 1 ≤ bound ≤ 2^32. */
  integer(bound: number): number;
  /** Standard normal (polar method: Marsaglia & Bray 1964, SIAM Rev. 6, 260). */
  normal(): number;
  /** Uniform random permutation of 0 … n − 1 (Fisher–Yates). */
  permutation(n: number): Int32Array;
}

import { log } from './elementary.ts';

/** One step of splitmix32 (the 32-bit finaliser of MurmurHash3 over a Weyl sequence). */
function mix(seed: number): number {
  let z = seed | 0;
  z = Math.imul(z ^ (z >>> 16), 0x85ebca6b);
  z = Math.imul(z ^ (z >>> 13), 0xc2b2ae35);
  return (z ^ (z >>> 16)) >>> 0;
}

/**
 * @param seed any integer 0 … 2^32 − 1
 * @param stream number(s) of an independent substream, e.g. the surrogate's number: results then do not
 *   depend on the order in which substreams are drawn
 */
export function createRandom(seed: number, ...stream: readonly number[]): Random {
  let weyl = seed >>> 0;
  for (const s of stream) weyl = mix((weyl ^ mix((s + 0x9e3779b9) | 0)) + 0x7f4a7c15);
  const word = () => {
    weyl = (weyl + 0x9e3779b9) | 0; // 2^32 / golden ratio, odd: full period
    return mix(weyl) | 0;
  };
  let [a, b, c, d] = [word(), word(), word(), word()];
  if ((a | b | c | d) === 0) a = 1; // the all-zero state is the one fixed point

  const next = (): number => {
    const x = Math.imul(b, 5);
    const result = Math.imul((x << 7) | (x >>> 25), 9);
    const t = b << 9;
    c ^= a;
    d ^= b;
    b ^= c;
    a ^= d;
    c ^= t;
    d = (d << 11) | (d >>> 21);
    return result >>> 0;
  };

  const uniform = () => ((next() >>> 5) * 0x4000000 + (next() >>> 6)) * 2 ** -53;

  const integer = (bound: number) => {
    const limit = 0x100000000 - (0x100000000 % bound);
    let x = next();
    while (x >= limit) x = next();
    return x % bound;
  };

  let spare: number | undefined;
  const normal = () => {
    if (spare !== undefined) {
      const value = spare;
      spare = undefined;
      return value;
    }
    for (;;) {
      const u = 2 * uniform() - 1;
      const v = 2 * uniform() - 1;
      const s = u * u + v * v;
      if (s >= 1 || s === 0) continue;
      const factor = Math.sqrt((-2 * log(s)) / s);
      spare = v * factor;
      return u * factor;
    }
  };

  const permutation = (n: number) => {
    const order = new Int32Array(n);
    for (let i = 0; i < n; i++) {
      const j = integer(i + 1);
      order[i] = order[j]!;
      order[j] = i;
    }
    return order;
  };

  return { uniform, integer, normal, permutation };
}
