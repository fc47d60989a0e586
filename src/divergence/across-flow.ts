import { log } from '../base/elementary.ts';
import type { DelayVectors, DivergenceSums } from '../base/kernels.ts';

/** Running products are rescaled by these powers of two, exactly: one logarithm per step instead of one per pair. */
const HIGH = 2 ** 256;
const LOW = 2 ** -256;

/**
 * Σ ln of the distance between two orbits of a flow. Two neighbours sampled in time are always up to half a sample
 * apart along their path, a difference that does not grow, and later one hurries ahead of the other; both hide or
 * distort the growth across. So the second orbit is followed at its state nearest to the first's (shifted by at most
 * one sample per step), and the part of the difference along the mean velocity (central differences) is taken off.
 * On the Lorenz and Rössler systems the plain distance grows 8 and 15 % too slowly at equal sampling.
 *
 * @param first starts of the first members. Samples from `most + 1` before each vector's oldest coordinate to
 *   `steps + most + 1` after its time must exist.
 * @param most largest shift in samples
 * @param blockStarts pairs are summed in blocks [blockStarts[b], blockStarts[b + 1])
 * @returns row-major blocks × (steps + 1)
 */
export function followAcrossFlow(
  { data, offsets }: DelayVectors,
  first: Int32Array,
  second: Int32Array,
  steps: number,
  most: number,
  blockStarts: Int32Array = Int32Array.of(0, first.length),
): DivergenceSums {
  const m = offsets.length;
  const size = (blockStarts.length - 1) * (steps + 1);
  const products = new Float64Array(size).fill(1);
  const exponents = new Int32Array(size);
  const counts = new Float64Array(size);
  const squaredDistance = (i: number, j: number): number => {
    let sum = 0;
    for (let d = 0; d < m; d++) {
      const difference = data[i + offsets[d]!]! - data[j + offsets[d]!]!;
      sum += difference * difference;
    }
    return sum;
  };
  for (let p = 0, row = 0; p < first.length; p++) {
    while (p >= blockStarts[row + 1]!) row++;
    // How far the second orbit is ahead of the first: it keeps to its nearest state.
    let ahead = 0;
    for (let s = 0; s <= steps; s++) {
      const i = first[p]! + s;
      let j = second[p]! + s + ahead;
      let distance = squaredDistance(i, j);
      const later = ahead < most ? squaredDistance(i, j + 1) : distance;
      const earlier = ahead > -most ? squaredDistance(i, j - 1) : distance;
      const shift = later < distance && later <= earlier ? 1 : earlier < distance ? -1 : 0;
      ahead += shift;
      j += shift;
      distance = shift === 1 ? later : shift === -1 ? earlier : distance;
      let [speed, along] = [0, 0];
      for (let d = 0; d < m; d++) {
        const a = i + offsets[d]!;
        const b = j + offsets[d]!;
        const velocity = data[a + 1]! - data[a - 1]! + (data[b + 1]! - data[b - 1]!);
        speed += velocity * velocity;
        along += (data[a]! - data[b]!) * velocity;
      }
      const square = speed > 0 ? distance - (along * along) / speed : distance;
      // Rounding may leave a negative rest; a pair with no difference across the flow says nothing.
      if (!(square > 1e-24 * distance) || square === 0) continue;
      const at = row * (steps + 1) + s;
      let product = products[at]! * square;
      if (product >= HIGH) {
        product *= LOW;
        exponents[at]! += 256;
      } else if (product < LOW) {
        product *= HIGH;
        exponents[at]! -= 256;
      }
      products[at] = product;
      counts[at]!++;
    }
  }
  return {
    logSums: products.map((product, i) => 0.5 * (log(product) + exponents[i]! * Math.LN2)),
    counts,
  };
}
