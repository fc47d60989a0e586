import type { Kernels } from '../base/kernels.ts';
import { falseNeighbourCounts, jointCounts, packDelayVectors } from '../fallback/delays.ts';
import type { WasmContext } from './wasm.ts';

export function createDelays(_context: WasmContext): Pick<Kernels, 'falseNeighbourCounts' | 'jointCounts' | 'packDelayVectors'> {
  return { falseNeighbourCounts, jointCounts, packDelayVectors };
}
