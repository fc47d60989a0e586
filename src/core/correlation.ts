import type { Kernels } from '../base/kernels.ts';
import { correlationCounts, correlationCountsFrom } from '../fallback/correlation.ts';
import type { WasmContext } from './wasm.ts';

export function createCorrelation(_context: WasmContext): Pick<Kernels, 'correlationCounts' | 'correlationCountsFrom'> {
  return { correlationCounts, correlationCountsFrom };
}
