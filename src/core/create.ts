import type { BackendName, Kernels } from '../base/kernels.ts';
import { createFallback } from '../fallback/index.ts';
import { createCorrelation } from './correlation.ts';
import { createDelays } from './delays.ts';
import { createDivergence } from './divergence.ts';
import { createFits } from './fits.ts';
import { createFlow } from './flow.ts';
import { createFourier } from './fourier.ts';
import { createNeighbours } from './neighbours.ts';
import { validated } from './validate.ts';
import { instantiate } from './wasm.ts';

/** Which build runs, with its compiled module; plain data that can be sent to workers. */
export interface BackendModule {
  readonly backend: BackendName;
  /** A compiled `WebAssembly.Module`; typed as object, so that the types need no DOM library. */
  readonly module: object | null;
}

/** Kernels of a loaded backend. Synchronous: what a worker calls. */
export function createKernels({ backend, module }: BackendModule): Kernels {
  if (module === null) return validated(createFallback());
  const context = instantiate(module as WebAssembly.Module);
  return validated({
    backend,
    ...createDelays(context),
    ...createNeighbours(context),
    ...createCorrelation(context),
    ...createDivergence(context),
    ...createFits(context),
    ...createFlow(context),
    ...createFourier(context),
    memory: () => ({ used: context.heap.used, peak: context.heap.peak }),
    close: () => {},
  });
}
