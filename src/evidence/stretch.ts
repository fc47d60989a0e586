import type { PreparedRecord } from '../recording/types.ts';

/** Samples used at most: a longer record adds little to a rank test and much to its cost. */
export const LONGEST_STRETCH = 65_536;
/** Share of the segment the trimming may cost. */
const LEAST_SHARE = 0.9;

/** Even lengths 2^a·3^b·5^c, which the Fourier transform takes, ascending, from `low` to `high`. */
export function smoothLengths(low: number, high: number): number[] {
  const lengths: number[] = [];
  for (let a = 2; a <= high; a *= 2)
    for (let b = a; b <= high; b *= 3) for (let c = b; c <= high; c *= 5) if (c >= low) lengths.push(c);
  return lengths.sort((x, y) => x - y);
}

/**
 * The stretch of the longest segment whose ends match best in value and slope. A Fourier surrogate joins
 * the end to the beginning; a jump there would be copied into all frequencies and give false rejections
 * (Theiler et al. 1992; Schreiber & Schmitz 2000, Physica D 142, 346).
 */
export function matchedStretch(
  record: PreparedRecord,
): { readonly start: number; readonly count: number } | null {
  const longest = record.segments.reduce((best, s) => (s.end - s.start > best.end - best.start ? s : best), {
    start: 0,
    end: 0,
  });
  const available = Math.min(longest.end - longest.start, LONGEST_STRETCH);
  if (available < 64) return null;
  const x = record.scaled.subarray(record.target * record.count, (record.target + 1) * record.count);
  let best = { start: longest.start, count: 0 };
  let bestMismatch = Number.POSITIVE_INFINITY;
  for (const count of smoothLengths(Math.ceil(LEAST_SHARE * available), available))
    for (let start = longest.start; start + count <= longest.end; start++) {
      const [a, b] = [start, start + count - 1];
      const jump = x[a]! - x[b]!;
      const kink = x[a + 1]! - x[a]! - (x[b]! - x[b - 1]!);
      const mismatch = jump * jump + kink * kink;
      if (mismatch < bestMismatch || (mismatch === bestMismatch && count > best.count)) {
        bestMismatch = mismatch;
        best = { start, count };
      }
    }
  return best.count > 0 ? best : null;
}
