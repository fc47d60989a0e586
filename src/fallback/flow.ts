import type { Kernels } from '../base/kernels.ts';

export const advanceFlow: Kernels['advanceFlow'] = () => {
  throw new Error('not built yet');
};
