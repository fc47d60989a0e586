import type { Kernels } from '../base/kernels.ts';
import { advanceFlow } from '../fallback/flow.ts';
import type { WasmContext } from './wasm.ts';

export function createFlow(_context: WasmContext): Pick<Kernels, 'advanceFlow'> {
  return { advanceFlow };
}
