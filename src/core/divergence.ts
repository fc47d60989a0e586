import type { Kernels } from '../base/kernels.ts';
import { divergenceSums, neighbourhoodDivergence } from '../fallback/divergence.ts';
import type { WasmContext } from './wasm.ts';

export function createDivergence(_context: WasmContext): Pick<Kernels, 'divergenceSums' | 'neighbourhoodDivergence'> {
  return { divergenceSums, neighbourhoodDivergence };
}
