import type { Kernels } from '../base/kernels.ts';

export const localFits: Kernels['localFits'] = () => {
  throw new Error('not built yet');
};
export const orthonormalise: Kernels['orthonormalise'] = () => {
  throw new Error('not built yet');
};
