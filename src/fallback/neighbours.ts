import type { Kernels } from '../base/kernels.ts';

export const neighbourIndex: Kernels['neighbourIndex'] = () => {
  throw new Error('not built yet');
};
