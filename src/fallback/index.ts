import type { Kernels } from '../base/kernels.ts';
import { correlationCounts, correlationCountsFrom } from './correlation.ts';
import { falseNeighbourCounts, jointCounts, packDelayVectors } from './delays.ts';
import { divergenceSums, neighbourhoodDivergence } from './divergence.ts';
import { localFits, orthonormalise } from './fits.ts';
import { advanceFlow } from './flow.ts';
import { realSeries, realSpectrum, surrogate } from './fourier.ts';
import { neighbourIndex } from './neighbours.ts';

/** The kernels in plain TypeScript: the same interface, the same bits. */
export function createFallback(): Kernels {
  return {
    backend: 'js',
    packDelayVectors,
    neighbourIndex,
    correlationCounts,
    correlationCountsFrom,
    falseNeighbourCounts,
    jointCounts,
    divergenceSums,
    neighbourhoodDivergence,
    localFits,
    orthonormalise,
    advanceFlow,
    realSpectrum,
    realSeries,
    surrogate,
    memory: () => ({ used: 0, peak: 0 }),
    close: () => {},
  };
}
