import type {
  DivergenceInput,
  DivergenceSums,
  Kernels,
  NeighbourhoodDivergenceInput,
} from '../base/kernels.ts';
import { scaledData, sumsOf } from '../fallback/divergence.ts';
import type { Scope } from './heap.ts';
import type { WasmContext } from './wasm.ts';

type Divergence = Pick<Kernels, 'divergenceSums' | 'neighbourhoodDivergence'>;

export function createDivergence(context: WasmContext): Divergence {
  return {
    divergenceSums: (input) => divergenceSums(context, input),
    neighbourhoodDivergence: (input) => neighbourhoodDivergence(context, input),
  };
}

function divergenceSums(context: WasmContext, input: DivergenceInput): DivergenceSums {
  const { first, second, lengths, offsets, steps } = input;
  const span = offsets.reduce((a, b) => Math.max(a, b)) - offsets.reduce((a, b) => Math.min(a, b));
  return run(context, 'divergenceSums', input, {
    // Where the offsets lie too far apart to share squared differences, there is no row of them.
    sharedSpan: span < (offsets.length - 1) * (steps + 1) ? span : 0,
    // Several offsets: the factors are squares of distances.
    power: offsets.length === 1 ? 1 : 0.5,
    own: (scope) => [
      scope.put(first),
      scope.put(second),
      scope.put(lengths),
      scope.put(offsets),
      offsets.length,
    ],
  });
}

function neighbourhoodDivergence(context: WasmContext, input: NeighbourhoodDivergenceInput): DivergenceSums {
  return run(context, 'neighbourhoodDivergence', input, {
    sharedSpan: 0,
    power: 1,
    own: (scope) => [
      scope.put(input.references),
      scope.put(input.rowStarts),
      scope.put(input.neighbours),
      scope.put(input.lengths),
    ],
  });
}

interface Run {
  readonly sharedSpan: number;
  readonly power: number;
  readonly own: (scope: Scope) => number[];
}

function run(
  { heap, call }: WasmContext,
  kernel: keyof Divergence,
  { data, steps, blockStarts }: DivergenceInput | NeighbourhoodDivergenceInput,
  { sharedSpan, power, own }: Run,
): DivergenceSums {
  const scaled = scaledData(data);
  return heap.scope((scope) => {
    const blocks = blockStarts.length - 1;
    const size = blocks * (steps + 1);
    const out = scope.take(3 * 8 * size);
    call(
      kernel,
      scope.put(scaled.data),
      ...own(scope),
      steps,
      scope.put(blockStarts),
      blocks,
      scope.take(call('divergenceScratchSize', steps, sharedSpan)),
      out,
    );
    const [products, exponents, counts] = [0, 1, 2].map((part) => scope.copyF64(out + part * 8 * size, size));
    return sumsOf(products!, exponents!, counts!, power, scaled.exponent);
  });
}
