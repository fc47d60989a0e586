import type { Kernels } from '../base/kernels.ts';
import { neighbourIndex } from '../fallback/neighbours.ts';
import type { WasmContext } from './wasm.ts';

export function createNeighbours(_context: WasmContext): Pick<Kernels, 'neighbourIndex'> {
  return { neighbourIndex };
}
