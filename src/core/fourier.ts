import type { Kernels } from '../base/kernels.ts';
import { realSeries, realSpectrum, surrogate } from '../fallback/fourier.ts';
import type { WasmContext } from './wasm.ts';

export function createFourier(_context: WasmContext): Pick<Kernels, 'realSeries' | 'realSpectrum' | 'surrogate'> {
  return { realSeries, realSpectrum, surrogate };
}
