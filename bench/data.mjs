/** Seeded data of the workloads. Lorenz system, classical Runge–Kutta step 0.01, x after a transient. */
export function lorenzSeries(count) {
  const out = new Float64Array(count);
  let s = [1, 1, 20];
  const f = ([x, y, z]) => [10 * (y - x), 28 * x - y - x * z, x * y - (8 / 3) * z];
  const add = (a, b, h) => a.map((v, i) => v + h * b[i]);
  const h = 0.01;
  for (let i = -2000; i < count; i++) {
    const k1 = f(s);
    const k2 = f(add(s, k1, h / 2));
    const k3 = f(add(s, k2, h / 2));
    const k4 = f(add(s, k3, h));
    s = s.map((v, j) => v + (h / 6) * (k1[j] + 2 * k2[j] + 2 * k3[j] + k4[j]));
    if (i >= 0) out[i] = s[0];
  }
  return out;
}

/** Every delay vector of a series, backward delays. */
export function delayVectors(series, dimension, delay) {
  const first = (dimension - 1) * delay;
  return {
    data: series,
    starts: Int32Array.from({ length: series.length - first }, (_, i) => i + first),
    offsets: Int32Array.from({ length: dimension }, (_, d) => -d * delay),
  };
}

/** 0 … n − 1 in a fixed pseudo-random order (multiplicative congruence with an odd step prime to n). */
export function scrambled(n) {
  let step = Math.floor(n * 0.6180339887) | 1;
  const gcd = (a, b) => (b === 0 ? a : gcd(b, a % b));
  while (gcd(step, n) !== 1) step += 2;
  return Int32Array.from({ length: n }, (_, i) => (i * step) % n);
}
