import type { Kernels } from '../base/kernels.ts';
import { localFits, orthonormalise } from '../fallback/fits.ts';
import type { WasmContext } from './wasm.ts';

export function createFits(_context: WasmContext): Pick<Kernels, 'localFits' | 'orthonormalise'> {
  return { localFits, orthonormalise };
}
