import type { Kernels } from '../base/kernels.ts';

export const realSeries: Kernels['realSeries'] = () => {
  throw new Error('not built yet');
};
export const realSpectrum: Kernels['realSpectrum'] = () => {
  throw new Error('not built yet');
};
export const surrogate: Kernels['surrogate'] = () => {
  throw new Error('not built yet');
};
