import type { Kernels } from '../base/kernels.ts';

/**
 * Samples times iterations of one kernel call: about 5 ms of wasm, 17 ms of plain JavaScript. Fewer would
 * pay again and again for the spectrum and order of the values that every call begins with.
 */
const WORK_PER_CALL = 100_000;

/**
 * Iterative amplitude-adjusted surrogate (Schreiber & Schmitz 1996, Phys. Rev. Lett. 77, 635) in slices.
 * @param permutation the starting shuffle
 */
export function* amplitudeAdjustedSurrogate(
  kernels: Kernels,
  values: Float64Array,
  permutation: Int32Array,
  iterations: number,
): Generator<number, Float64Array, void> {
  const perCall = Math.max(2, Math.floor(WORK_PER_CALL / values.length));
  let ranks = permutation;
  for (let done = 0; ; ) {
    const step = kernels.surrogate({
      values,
      permutation: ranks,
      iterations: Math.min(perCall, iterations - done),
    });
    done += step.iterations;
    if (step.converged || done >= iterations) return step.values;
    ranks = step.ranks;
    yield done / iterations;
  }
}
