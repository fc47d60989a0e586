import type { DelayVectors } from '../base/kernels.ts';
import type { Reconstruction } from '../reconstruct/types.ts';
import type { PreparedRecord } from '../recording/types.ts';
import { delayVectors } from '../recording/vectors.ts';

/** Vectors searched at most; of longer records every n-th is used. */
const LIBRARY = 100_000;

/**
 * Delay vectors that can be followed `steps` samples ahead within their segment, with room for a shift of either
 * orbit and the central difference beyond it.
 */
export function followable(
  record: Pick<PreparedRecord, 'scaled' | 'count' | 'channelCount' | 'segments'>,
  reconstruction: Pick<Reconstruction, 'delay' | 'delaysPerChannel'>,
  steps: number,
  shift: number | null,
): DelayVectors {
  const room = shift === null ? 0 : shift + 1;
  const all = delayVectors(
    record,
    { delay: reconstruction.delay.samples, delaysPerChannel: reconstruction.delaysPerChannel },
    steps + room,
  );
  const { starts } = all;
  const inside = new Int32Array(starts.length);
  let n = 0;
  // A vector `room` samples earlier in the same segment proves that so many samples precede this one.
  for (let i = room; i < starts.length; i++)
    if (starts[i - room] === starts[i]! - room) inside[n++] = starts[i]!;
  const stride = Math.max(1, Math.ceil(n / LIBRARY));
  const kept = new Int32Array(Math.ceil(n / stride));
  for (let i = 0; i < kept.length; i++) kept[i] = inside[i * stride]!;
  return { ...all, starts: kept };
}

/** How many vectors `followable` would give of a record with no more than its cap. */
export function countFollowable(
  record: Pick<PreparedRecord, 'segments'>,
  reconstruction: Pick<Reconstruction, 'delay' | 'delaysPerChannel'>,
  steps: number,
  shift: number | null,
): number {
  const back = (reconstruction.delaysPerChannel - 1) * reconstruction.delay.samples;
  const room = shift === null ? 0 : shift + 1;
  let n = 0;
  for (const { start, end } of record.segments) n += Math.max(0, end - start - back - steps - 2 * room);
  return n;
}

/** At most `most` ordinals spread evenly over 0 … n − 1. */
export function evenReferences(n: number, most: number): Int32Array {
  const number = Math.min(n, most);
  return Int32Array.from({ length: number }, (_, i) => Math.floor((i * n) / number));
}
