import type { Kernels } from '../base/kernels.ts';

export const correlationCounts: Kernels['correlationCounts'] = () => {
  throw new Error('not built yet');
};
export const correlationCountsFrom: Kernels['correlationCountsFrom'] = () => {
  throw new Error('not built yet');
};
