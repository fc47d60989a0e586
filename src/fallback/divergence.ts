import type { Kernels } from '../base/kernels.ts';

export const divergenceSums: Kernels['divergenceSums'] = () => {
  throw new Error('not built yet');
};
export const neighbourhoodDivergence: Kernels['neighbourhoodDivergence'] = () => {
  throw new Error('not built yet');
};
