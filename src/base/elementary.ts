/**
 * Elementary functions with the same bits on every host: the specification of JavaScript leaves those of
 * `Math` to the engine. The algorithms and coefficients are those of FDLIBM (Sun Microsystems 1993, the
 * freely distributable library behind most C run times), error below one unit in the last place.
 * Only additions, multiplications, divisions and bit patterns are used, which IEEE 754 fixes.
 */

const littleEndian = new Uint8Array(Uint16Array.of(1).buffer)[0] === 1;
const HIGH = littleEndian ? 1 : 0;

/**
 * The bits of one double. Shared, because a buffer per call would cost ten times the function; every use
 * writes it before reading, and nothing yields between.
 */
const float = new Float64Array(1);
const words = new Int32Array(float.buffer);

/** Splits ln 2 so that k·LN2_HIGH is exact for |k| < 2^20. */
const LN2_HIGH = 6.9314718036912381649e-1; // 0x3fe62e42 fee00000
const LN2_LOW = 1.90821492927058770002e-10; // 0x3dea39ef 35793c76
const TWO_54 = 2 ** 54;

/** Coefficients of the polynomial for log(1 + f), minimax in s = f / (2 + f). */
const LG1 = 6.66666666666673513e-1;
const LG2 = 3.999999999940941908e-1;
const LG3 = 2.857142874366239149e-1;
const LG4 = 2.222219843214978396e-1;
const LG5 = 1.818357216161805012e-1;
const LG6 = 1.531383769920937332e-1;
const LG7 = 1.479819860511658591e-1;

/** Natural logarithm. log(0) = −Infinity, log(x < 0) = NaN. */
export function log(x: number): number {
  if (!(x > 0)) return x === 0 ? Number.NEGATIVE_INFINITY : Number.NaN;
  if (x === Number.POSITIVE_INFINITY) return x;
  let k = 0;
  float[0] = x;
  if (words[HIGH]! < 0x00100000) {
    float[0] = x * TWO_54; // subnormal
    k = -54;
  }
  let high = words[HIGH]!;
  k += (high >> 20) - 1023;
  high &= 0x000fffff;
  // Bring the mantissa to √2/2 … √2.
  const carry = (high + 0x95f64) & 0x100000;
  words[HIGH] = high | (carry ^ 0x3ff00000);
  k += carry >> 20;
  const f = float[0]! - 1;
  const halfSquare = 0.5 * f * f;
  const s = f / (2 + f);
  const z = s * s;
  const w = z * z;
  const even = w * (LG2 + w * (LG4 + w * LG6));
  const odd = z * (LG1 + w * (LG3 + w * (LG5 + w * LG7)));
  const r = even + odd;
  return k * LN2_HIGH - (halfSquare - (s * (halfSquare + r) + k * LN2_LOW) - f);
}

const EXP_OVERFLOW = 7.09782712893383973096e2;
const EXP_UNDERFLOW = -7.4513321910194110842e2;
const INVERSE_LN2 = 1.442695040888963387;
/** Coefficients of x − x·(e^x + 1)/(e^x − 1)… on |x| ≤ ln 2 / 2, minimax in x². */
const P1 = 1.66666666666666019037e-1;
const P2 = -2.77777777770155933842e-3;
const P3 = 6.61375632143793436117e-5;
const P4 = -1.6533902205465251539e-6;
const P5 = 4.13813679705723846039e-8;

/** Exponential. */
export function exp(x: number): number {
  if (Number.isNaN(x)) return x;
  if (x > EXP_OVERFLOW) return Number.POSITIVE_INFINITY;
  if (x < EXP_UNDERFLOW) return 0;
  const k = x < 0 ? Math.ceil(INVERSE_LN2 * x - 0.5) : Math.floor(INVERSE_LN2 * x + 0.5);
  const high = x - k * LN2_HIGH;
  const low = k * LN2_LOW;
  const r = high - low;
  const t = r * r;
  const c = r - t * (P1 + t * (P2 + t * (P3 + t * (P4 + t * P5))));
  const y = 1 - (low - (r * c) / (2 - c) - high);
  return scale(y, k);
}

/** y · 2^k, in two exact steps where 2^k alone would leave the normal range. */
function scale(y: number, k: number): number {
  if (k > 1023) return y * 2 * powerOfTwo(k - 1);
  if (k < -1022) return y * powerOfTwo(k + 1000) * powerOfTwo(-1000);
  return y * powerOfTwo(k);
}

/** 2^k for −1022 ≤ k ≤ 1023, by its bit pattern. */
export function powerOfTwo(k: number): number {
  float[0] = 0;
  words[HIGH] = (k + 1023) << 20;
  return float[0]!;
}

/** π/2 in parts of 33 bits, for the reduction of Cody and Waite 1980. */
const TWO_OVER_PI = 6.36619772367581382433e-1;
const PIO2_1 = 1.57079632673412561417;
const PIO2_2 = 6.0771005063039659766e-11;
const PIO2_3 = 2.0222662487111664558e-21;
const PIO2_3T = 8.47842766036889956997e-32;
/** Above this the three-part reduction loses bits: n · π/2's parts are no longer exact. */
const REDUCTION_LIMIT = 2 ** 20 * 1.5707963267948966;

const S1 = -1.66666666666666324348e-1;
const S2 = 8.33333333332248946124e-3;
const S3 = -1.98412698298579493134e-4;
const S4 = 2.75573137070700676789e-6;
const S5 = -2.50507602534068634195e-8;
const S6 = 1.58969099521155010221e-10;
const C1 = 4.16666666666666019037e-2;
const C2 = -1.38888888888741095749e-3;
const C3 = 2.48015872894767294178e-5;
const C4 = -2.75573143513906633035e-7;
const C5 = 2.0875723212981748279e-9;
const C6 = -1.13596475577881948265e-11;

/** sin on |x| ≤ π/4 for x + y, y the tail of x. */
function kernelSin(x: number, y: number): number {
  const z = x * x;
  const v = z * x;
  const r = S2 + z * (S3 + z * (S4 + z * (S5 + z * S6)));
  return x - (z * (0.5 * y - v * r) - y - v * S1);
}

/** cos on |x| ≤ π/4 for x + y. */
function kernelCos(x: number, y: number): number {
  const z = x * x;
  const r = z * (C1 + z * (C2 + z * (C3 + z * (C4 + z * (C5 + z * C6)))));
  const half = 0.5 * z;
  const w = 1 - half;
  return w + (1 - w - half + (z * r - x * y));
}

/**
 * x − n·π/2 as head and tail with |head| ≤ π/4 (a little over), and n modulo 4, for |x| below the limit.
 * n times each of the three parts of π/2 (33 bits each) is exact; what each difference rounds off is kept.
 */
function reduce(x: number): { readonly n: number; readonly head: number; readonly tail: number } {
  const n = Math.floor(x * TWO_OVER_PI + 0.5);
  const first = x - n * PIO2_1;
  const second = first - n * PIO2_2;
  const lostSecond = first - second - n * PIO2_2;
  const third = second - n * PIO2_3;
  const lostThird = second - third - n * PIO2_3;
  const rest = n * PIO2_3T - lostThird - lostSecond;
  const head = third - rest;
  return { n: ((n % 4) + 4) % 4, head, tail: third - head - rest };
}

/**
 * Sine. Arguments beyond ±2^20·π/2 (about 1.6 million) are outside the reduction's exact range and throw:
 * phases here are kept within a few turns.
 */
export function sin(x: number): number {
  if (!Number.isFinite(x)) return Number.NaN;
  if (Math.abs(x) <= 0.7853981633974483) return kernelSin(x, 0);
  const { n, head, tail } = reduceChecked(x);
  return n === 0
    ? kernelSin(head, tail)
    : n === 1
      ? kernelCos(head, tail)
      : n === 2
        ? -kernelSin(head, tail)
        : -kernelCos(head, tail);
}

/** Cosine; range as `sin`. */
export function cos(x: number): number {
  if (!Number.isFinite(x)) return Number.NaN;
  if (Math.abs(x) <= 0.7853981633974483) return kernelCos(x, 0);
  const { n, head, tail } = reduceChecked(x);
  return n === 0
    ? kernelCos(head, tail)
    : n === 1
      ? -kernelSin(head, tail)
      : n === 2
        ? -kernelCos(head, tail)
        : kernelSin(head, tail);
}

function reduceChecked(x: number) {
  if (Math.abs(x) > REDUCTION_LIMIT) throw new RangeError(`sin and cos take |x| ≤ 2^20·π/2; got ${x}`);
  return reduce(x);
}

/** Base-2 logarithm. */
export function log2(x: number): number {
  return log(x) / Math.LN2;
}

/** Base-10 logarithm. */
export function log10(x: number): number {
  return log(x) / Math.LN10;
}

/** x^y for x > 0, as exp(y·log x): about |y·log x| units in the last place. 0^y = 0 for y > 0. */
export function pow(x: number, y: number): number {
  if (x === 0) return y > 0 ? 0 : y === 0 ? 1 : Number.POSITIVE_INFINITY;
  return exp(y * log(x));
}
