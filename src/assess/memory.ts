import { LeadspanError } from '../base/errors.ts';

/**
 * Bytes an assessment takes at most, for the record's own arrays and the threads' copies of them.
 * Measured as peak resident growth and rounded up: per sample and channel 8 bytes each for the caller's
 * copy, the scaled copy and one copy in flight per thread; per sample and thread about 160 bytes for the
 * search tree, neighbour lists and correlation bytes in linear memory; 24 MB fixed per thread (instance,
 * code, the libraries' bounded reference sets).
 */
export function estimateAssessBytes(count: number, channels: number, threads: number): number {
  const lanes = Math.max(threads, 1);
  return count * channels * 8 * (2 + lanes) + count * 160 * lanes + 24e6 * lanes;
}

/** @throws LeadspanError MEMORY_LIMIT with the estimate */
export function requireMemory(bytes: number, limit: number, what: string): void {
  if (bytes <= limit) return;
  const megabytes = (b: number) => `${Math.ceil(b / 1e6)} MB`;
  throw new LeadspanError(
    'MEMORY_LIMIT',
    `${what} needs about ${megabytes(bytes)}; memoryLimit allows ${megabytes(limit)}. Raise memoryLimit, use fewer threads or a shorter record.`,
    { field: 'memoryLimit' },
  );
}
