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
  // A vector `room` samples earlier in the same segment proves that so many samples precede this one.
  const inside = starts.filter((t, i) => i >= room && starts[i - room] === t - room);
  const stride = Math.max(1, Math.ceil(inside.length / LIBRARY));
  return { ...all, starts: stride === 1 ? inside : inside.filter((_, i) => i % stride === 0) };
}

/** At most `most` ordinals spread evenly over 0 … n − 1. */
export function evenReferences(n: number, most: number): Int32Array {
  const number = Math.min(n, most);
  return Int32Array.from({ length: number }, (_, i) => Math.floor((i * n) / number));
}
