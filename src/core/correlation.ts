import {
  CORRELATION_EDGES,
  type CorrelationCounts,
  type CorrelationInput,
  type Kernels,
} from '../base/kernels.ts';
import { CLASSES, classBase, countsOf } from '../fallback/correlation.ts';
import type { Scope } from './heap.ts';
import type { WasmContext } from './wasm.ts';

/** Samples the vector lanes may read past the end of the record. */
const PADDING = 32;
/** The tables count in u32; of two pairs at most one steps a cell. */
const DRAIN_AFTER = 2 ** 32;

type Correlation = Pick<Kernels, 'correlationCounts' | 'correlationCountsFrom'>;

/** @param drainAfter pairs after which the tables are emptied; fewer in tests only */
export function createCorrelation(context: WasmContext, drainAfter = DRAIN_AFTER): Correlation {
  return {
    correlationCounts: (input) =>
      count(context, input, drainAfter, 'correlationCounts', (scope) => [
        scope.take(input.series.length + PADDING),
      ]),
    correlationCountsFrom: (input, references) =>
      count(context, input, drainAfter, 'correlationCountsFrom', (scope) => [
        scope.put(references),
        references.length,
        scope.take(input.valid.length),
      ]),
  };
}

function count(
  { heap, call }: WasmContext,
  input: CorrelationInput,
  drainAfter: number,
  kernel: keyof Correlation,
  own: (scope: Scope) => number[],
): CorrelationCounts {
  const { series, valid, delay, dimensions, exclusion } = input;
  return heap.scope((scope) => {
    const samples = scope.take(8 * (series.length + PADDING));
    const barred = scope.take(valid.length + PADDING);
    const others = own(scope);
    const tables = scope.take(call('correlationTablesSize', dimensions));
    const size = dimensions * CLASSES;
    const histogram = scope.take(8 * size);
    heap.f64(samples, series.length).set(series);
    heap.f64(samples + 8 * series.length, PADDING).fill(0);
    const flags = heap.u8(barred, valid.length + PADDING).fill(CORRELATION_EDGES);
    for (let t = 0; t < valid.length; t++) if (valid[t] === 1) flags[t] = 0;
    heap.f64(histogram, size).fill(0);
    const pairs = call(
      kernel,
      samples,
      barred,
      valid.length,
      delay,
      dimensions,
      // Beyond every lag either way; an i32 for the kernel.
      Math.min(exclusion, valid.length),
      classBase(input),
      ...others,
      tables,
      drainAfter,
      histogram,
    );
    return countsOf(input, heap.f64(histogram, size), pairs);
  });
}
