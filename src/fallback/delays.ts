import type { Kernels } from '../base/kernels.ts';

export const falseNeighbourCounts: Kernels['falseNeighbourCounts'] = () => {
  throw new Error('not built yet');
};
export const jointCounts: Kernels['jointCounts'] = () => {
  throw new Error('not built yet');
};
export const packDelayVectors: Kernels['packDelayVectors'] = () => {
  throw new Error('not built yet');
};
