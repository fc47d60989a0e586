/** `leadspan/kernels`: the raw numerics, for people who build their own analysis inside their own worker. */
export { isLeadspanError, LeadspanError } from './base/errors.ts';
export type * from './base/kernels.ts';
export { CORRELATION_EDGES } from './base/kernels.ts';
export { type OpenOptions, openKernels } from './core/open.ts';
