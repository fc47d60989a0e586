// sin and cos with the bits of src/base/elementary.ts (FDLIBM's algorithms; see there). Twin, operation by
// operation.

const TWO_OVER_PI: f64 = 6.36619772367581382433e-1;
const PIO2_1: f64 = 1.57079632673412561417;
const PIO2_2: f64 = 6.07710050630396597660e-11;
const PIO2_3: f64 = 2.02226624871116645580e-21;
const PIO2_3T: f64 = 8.47842766036889956997e-32;
const S1: f64 = -1.66666666666666324348e-1;
const S2: f64 = 8.33333333332248946124e-3;
const S3: f64 = -1.98412698298579493134e-4;
const S4: f64 = 2.75573137070700676789e-6;
const S5: f64 = -2.50507602534068634195e-8;
const S6: f64 = 1.58969099521155010221e-10;
const C1: f64 = 4.16666666666666019037e-2;
const C2: f64 = -1.38888888888741095749e-3;
const C3: f64 = 2.48015872894767294178e-5;
const C4: f64 = -2.75573143513906633035e-7;
const C5: f64 = 2.08757232129817482790e-9;
const C6: f64 = -1.13596475577881948265e-11;

function kernelSin(x: f64, y: f64): f64 {
  const z = x * x;
  const v = z * x;
  const r = S2 + z * (S3 + z * (S4 + z * (S5 + z * S6)));
  return x - (z * (0.5 * y - v * r) - y - v * S1);
}

function kernelCos(x: f64, y: f64): f64 {
  const z = x * x;
  const r = z * (C1 + z * (C2 + z * (C3 + z * (C4 + z * (C5 + z * C6)))));
  const half = 0.5 * z;
  const w = 1 - half;
  return w + (1 - w - half + (z * r - x * y));
}

/** sin(x) for quarter = 0, cos(x) for quarter = 1: the reduction is shared. |x| ≤ 2^20·π/2. */
function turned(x: f64, quarter: i32): f64 {
  if (abs(x) <= 0.7853981633974483) return quarter == 0 ? kernelSin(x, 0) : kernelCos(x, 0);
  const n = Math.floor(x * TWO_OVER_PI + 0.5);
  const first = x - n * PIO2_1;
  const second = first - n * PIO2_2;
  const lostSecond = first - second - n * PIO2_2;
  const third = second - n * PIO2_3;
  const lostThird = second - third - n * PIO2_3;
  const rest = n * PIO2_3T - lostThird - lostSecond;
  const head = third - rest;
  const tail = third - head - rest;
  const k = (<i32>n + quarter) & 3;
  if (k == 0) return kernelSin(head, tail);
  if (k == 1) return kernelCos(head, tail);
  return k == 2 ? -kernelSin(head, tail) : -kernelCos(head, tail);
}

export function sine(x: f64): f64 {
  return turned(x, 0);
}

export function cosine(x: f64): f64 {
  return turned(x, 1);
}
