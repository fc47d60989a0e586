import type {
  FalseNeighbourCounts,
  FalseNeighbourInput,
  JointCountsInput,
  Kernels,
} from '../base/kernels.ts';
import { packDelayVectors } from '../fallback/delays.ts';
import type { WasmContext } from './wasm.ts';

/**
 * Packing is moving memory and nothing else: carrying the record into linear memory and the vectors out again
 * costs more than the loop itself, so every backend packs in TypeScript.
 */
export function createDelays(
  context: WasmContext,
): Pick<Kernels, 'falseNeighbourCounts' | 'jointCounts' | 'packDelayVectors'> {
  return {
    packDelayVectors,
    falseNeighbourCounts: (input) => falseNeighbourCounts(context, input),
    jointCounts: (input) => jointCounts(context, input),
  };
}

function falseNeighbourCounts(
  { heap, call }: WasmContext,
  { vectors, neighbours, distances, nextOffset, threshold, judgeableDistance }: FalseNeighbourInput,
): FalseNeighbourCounts {
  return heap.scope((scope) => {
    const out = scope.take(40);
    call(
      'falseNeighbourCounts',
      scope.put(vectors.data),
      scope.put(vectors.starts),
      scope.put(neighbours),
      scope.put(distances),
      neighbours.length,
      nextOffset,
      threshold,
      judgeableDistance,
      out,
    );
    const [judged, falseNeighbours, expansionSum, stepSum, pairs] = heap.f64(out, 5) as unknown as [
      number,
      number,
      number,
      number,
      number,
    ];
    return { judged, falseNeighbours, expansionSum, stepSum, pairs };
  });
}

function jointCounts({ heap, call }: WasmContext, { symbols, bins, lags }: JointCountsInput): Float64Array {
  return heap.scope((scope) => {
    const size = lags.length * bins * bins;
    const out = scope.take(8 * size);
    call(
      'jointCounts',
      scope.put(symbols),
      symbols.length,
      bins,
      scope.put(lags),
      lags.length,
      scope.take(8 * (bins + 1) * (bins + 1)),
      out,
    );
    return scope.copyF64(out, size);
  });
}
