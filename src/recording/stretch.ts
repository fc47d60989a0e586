import type { PreparedRecord } from './types.ts';

/** Share of the segment that trimming may cost. */
const LEAST_SHARE = 0.9;
/** Shorter stretches have too few frequencies to make surrogates of. */
const FEWEST_SAMPLES = 64;

/** Samples [start, start + count) of a record. */
export interface Stretch {
  readonly start: number;
  readonly count: number;
}

/** Even lengths 2^a·3^b·5^c, which the Fourier transform takes, ascending, from `low` to `high`. */
export function smoothLengths(low: number, high: number): number[] {
  const lengths: number[] = [];
  for (let a = 2; a <= high; a *= 2)
    for (let b = a; b <= high; b *= 3) for (let c = b; c <= high; c *= 5) if (c >= low) lengths.push(c);
  return lengths.sort((x, y) => x - y);
}

/**
 * The stretch of the longest segment, at most `longest` samples, whose ends match best in value and slope.
 * A Fourier surrogate joins the end to the beginning; a jump there would be copied into all frequencies
 * (Theiler et al. 1992, Physica D 58, 77; Schreiber & Schmitz 2000, Physica D 142, 346).
 */
export function matchedStretch(
  record: Pick<PreparedRecord, 'segments' | 'scaled' | 'count' | 'target'>,
  longest: number,
): Stretch | null {
  let segment = { start: 0, end: 0 };
  for (const s of record.segments) if (s.end - s.start > segment.end - segment.start) segment = s;
  const available = Math.min(segment.end - segment.start, longest);
  if (available < FEWEST_SAMPLES) return null;
  const base = record.target * record.count;
  const x = record.scaled.subarray(base, base + record.count);
  // Beyond a few thousand starts a better match is not worth the search.
  const lastStart = Math.min(segment.end, segment.start + available + 4096);
  let best: Stretch | null = null;
  let bestMismatch = Number.POSITIVE_INFINITY;
  for (const count of smoothLengths(Math.ceil(LEAST_SHARE * available), available))
    for (let start = segment.start; start + count <= lastStart; start++) {
      const last = start + count - 1;
      const jump = x[start]! - x[last]!;
      const kink = x[start + 1]! - x[start]! - (x[last]! - x[last - 1]!);
      const mismatch = jump * jump + kink * kink;
      if (mismatch < bestMismatch || (mismatch === bestMismatch && count > best!.count)) {
        bestMismatch = mismatch;
        best = { start, count };
      }
    }
  return best;
}
