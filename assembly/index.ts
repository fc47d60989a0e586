// Entry of both builds (SIMD and scalar). Each subject file exports its kernels; the ABI is known only
// here and in src/core/. Kernels take addresses and counts, never allocate, and import nothing.
export { argsortScratch } from './argsort';
export * from './correlation';
export * from './delays';
export * from './divergence';
export * from './fits';
export * from './flow';
export * from './fourier';
export * from './neighbours';

/** First byte the host may use. */
export function heapBase(): usize {
  return __heap_base;
}

/** 1 in the SIMD build: lets the host name a module it was given. */
export function hasSimd(): i32 {
  return ASC_FEATURE_SIMD ? 1 : 0;
}
