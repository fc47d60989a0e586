import { log } from '../base/elementary.ts';
import type { FieldName, Kernels } from '../base/kernels.ts';
import type { WasmContext } from './wasm.ts';

/** Numbers of the fields in assembly/fields.ts. */
const FIELD_NUMBERS: Readonly<Record<FieldName, number>> = {
  lorenz: 0,
  rossler: 1,
  'hyperchaotic-rossler': 2,
  chua: 3,
  ueda: 4,
  'quadratic-jerk': 5,
  'lorenz-96': 6,
};

/** Parameters are padded to this many, so that a field may read them all. */
const PARAMETERS = 4;

export function createFlow({ heap, call }: WasmContext): Pick<Kernels, 'advanceFlow'> {
  return {
    advanceFlow: ({ field, parameters, state, tangents, tangentCount: count, step, stepsPerBlock, blocks }) =>
      heap.scope((scope) => {
        const n = state.length;
        // Two tangents go together in the SIMD build: an odd number gets a column of zeros.
        const width = count + (count & 1);
        const padded = new Float64Array(n * width);
        for (let i = 0; i < n; i++) padded.set(tangents.subarray(i * count, (i + 1) * count), i * width);
        const allParameters = new Float64Array(PARAMETERS);
        allParameters.set(parameters);

        const p = scope.put(allParameters);
        const s = scope.put(state);
        const t = scope.put(padded);
        const norms = scope.take(8 * blocks * count);
        const divergences = scope.take(8 * blocks);
        const scratch = scope.take(8 * (5 * n + 5 * n * width + width));
        call(
          'advanceFlow',
          FIELD_NUMBERS[field],
          n,
          p,
          s,
          t,
          count,
          width,
          step,
          stepsPerBlock,
          blocks,
          norms,
          divergences,
          scratch,
        );

        const after = heap.f64(t, n * width);
        const result = new Float64Array(n * count);
        for (let i = 0; i < n; i++) result.set(after.subarray(i * width, i * width + count), i * count);
        return {
          state: scope.copyF64(s, n),
          tangents: result,
          logNorms: scope
            .copyF64(norms, blocks * count)
            .map((norm) => (norm > 0 ? log(norm) : Number.NEGATIVE_INFINITY)),
          divergences: scope.copyF64(divergences, blocks),
        };
      }),
  };
}
