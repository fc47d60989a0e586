import { log } from '../base/elementary.ts';
import type { Kernels } from '../base/kernels.ts';
import type { WasmContext } from './wasm.ts';

export function createFits({ heap, call }: WasmContext): Pick<Kernels, 'localFits' | 'orthonormalise'> {
  return {
    localFits: ({
      vectors,
      targetOffsets,
      queries,
      neighbours,
      order,
      weights,
      ridge,
      coefficients: wanted,
    }) =>
      heap.scope((scope) => {
        const m = vectors.offsets.length;
        const targets = targetOffsets.length;
        const { k, indices, distances } = neighbours;
        const count = indices.length / k;
        const library = [
          scope.put(vectors.data),
          scope.put(vectors.starts),
          scope.put(vectors.offsets),
          m,
        ] as const;
        const goals = [scope.put(targetOffsets), targets] as const;
        const asked = [scope.put(queries), count, scope.put(indices), scope.put(distances), k] as const;
        const predictions = scope.take(8 * count * targets);
        const maps = wanted ? scope.take(8 * count * targets * m) : 0;
        if (maps !== 0) heap.f64(maps, count * targets * m).fill(0);
        const scratch = scope.take(call('localFitsScratch', k, m, targets));
        call(
          'localFits',
          ...library,
          ...goals,
          ...asked,
          order,
          weights === 'tricube' ? 1 : 0,
          ridge,
          predictions,
          maps,
          scratch,
        );
        return {
          predictions: scope.copyF64(predictions, count * targets),
          ...(wanted ? { coefficients: scope.copyF64(maps, count * targets * m) } : {}),
        };
      }),

    orthonormalise: (matrix, rows, columns) =>
      heap.scope((scope) => {
        const a = scope.put(matrix);
        const norms = scope.take(8 * columns);
        call('orthonormalise', a, rows, columns, norms, scope.take(8 * columns));
        return {
          matrix: scope.copyF64(a, rows * columns),
          logNorms: scope
            .copyF64(norms, columns)
            .map((norm) => (norm > 0 ? log(norm) : Number.NEGATIVE_INFINITY)),
        };
      }),
  };
}
