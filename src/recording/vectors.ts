import type { DelayVectors } from '../base/kernels.ts';
import type { PreparedRecord } from './types.ts';

/** Shape of a delay vector. */
export interface VectorShape {
  /** Delay in samples, ≥ 1. */
  readonly delay: number;
  /** Coordinates per channel, ≥ 1. */
  readonly delaysPerChannel: number;
}

/**
 * Delay vectors of a record with backward delays (Packard et al. 1980; Takens 1981): coordinate k of
 * channel c at time t is sample t − k·delay, k = 0 … delaysPerChannel − 1, channel by channel. Listed are
 * the times at which every coordinate and the next `ahead` samples lie in one segment, so neither a vector
 * nor a target `ahead` samples later bridges a gap.
 */
export function delayVectors(
  record: Pick<PreparedRecord, 'scaled' | 'count' | 'channelCount' | 'segments'>,
  shape: VectorShape,
  ahead = 0,
): DelayVectors {
  const { count, channelCount, segments } = record;
  const { delay, delaysPerChannel } = shape;
  const back = (delaysPerChannel - 1) * delay;
  let n = 0;
  for (const { start, end } of segments) n += Math.max(0, end - ahead - (start + back));
  const starts = new Int32Array(n);
  let i = 0;
  for (const { start, end } of segments) for (let t = start + back; t < end - ahead; t++) starts[i++] = t;
  const offsets = new Int32Array(channelCount * delaysPerChannel);
  for (let c = 0; c < channelCount; c++)
    for (let k = 0; k < delaysPerChannel; k++) offsets[c * delaysPerChannel + k] = c * count - k * delay;
  return { data: record.scaled, starts, offsets };
}
