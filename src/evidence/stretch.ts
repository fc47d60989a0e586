import { matchedStretch, type Stretch } from '../recording/stretch.ts';
import type { PreparedRecord } from '../recording/types.ts';

/** Samples used at most: a longer record adds little to a rank test or a line spectrum and much to their cost. */
const LONGEST_STRETCH = 65_536;

/** The target over the longest segment, or over as much of its middle as is used at most. */
export function longestStretch(record: PreparedRecord): Float64Array {
  let segment = { start: 0, end: 0 };
  for (const s of record.segments) if (s.end - s.start > segment.end - segment.start) segment = s;
  const count = Math.min(segment.end - segment.start, LONGEST_STRETCH);
  const start = segment.start + ((segment.end - segment.start - count) >> 1);
  return valuesOf(record, { start, count });
}

/** A stretch of it whose ends match, for Fourier surrogates; null when there is none. */
export function surrogateStretch(
  record: PreparedRecord,
): { readonly values: Float64Array; readonly stretch: Stretch } | null {
  const stretch = matchedStretch(record, LONGEST_STRETCH);
  return stretch === null ? null : { values: valuesOf(record, stretch), stretch };
}

function valuesOf(record: PreparedRecord, { start, count }: Stretch): Float64Array {
  const from = record.target * record.count + start;
  return record.scaled.slice(from, from + count);
}
