import { log } from '../base/elementary.ts';
import type { Reconstruction } from '../reconstruct/types.ts';
import type { PreparedRecord } from '../recording/types.ts';
import { type EvidenceLine, neutral, short } from './line.ts';

/** Order of the patterns: 24 patterns of 4 need a few hundred samples to be missed by more than chance. */
const ORDER = 4;
const PATTERNS = 24;
/** Samples per pattern below which an absent one may be chance. */
const SAMPLES_PER_PATTERN = 20;

export interface OrdinalPatterns extends EvidenceLine {
  /** Patterns of four values that never occur; null when not counted. */
  readonly missing: number | null;
}

/**
 * Ordinal patterns (Bandt & Pompe 2002, Phys. Rev. Lett. 88, 174102): the order of four values spaced by
 * the delay. Windows with ties (quantisation) are left out. Missing patterns show short-range structure
 * without any metric; linear correlation makes patterns rare too, so this line only supports others.
 */
export function countOrdinalPatterns(
  record: PreparedRecord,
  reconstruction: Reconstruction,
): OrdinalPatterns {
  const { counts, windows } = ordinalCounts(record, Math.max(1, reconstruction.delay.samples));
  if (windows < PATTERNS * SAMPLES_PER_PATTERN)
    return {
      missing: null,
      reasons: [
        neutral(
          'ORDINAL_NOT_COUNTED',
          `Only ${windows} windows of ${ORDER} distinct values: too few for ordinal patterns.`,
        ),
      ],
    };
  let entropy = 0;
  let missing = 0;
  for (const count of counts) {
    if (count === 0) missing++;
    else entropy -= (count / windows) * log(count / windows);
  }
  const relative = entropy / log(PATTERNS);
  return {
    missing,
    reasons: [
      {
        code: 'ORDINAL_PATTERNS',
        text: `Of the ${PATTERNS} orders of ${ORDER} values, ${missing} never occur; their entropy is ${short(relative)} of that of white noise.`,
        value: relative,
        threshold: null,
        speaksFor: 'none',
      },
    ],
  };
}

/** Counts of the 24 patterns over all windows with distinct values. */
export function ordinalCounts(
  record: Pick<PreparedRecord, 'scaled' | 'count' | 'target' | 'segments'>,
  lag: number,
): { readonly counts: Int32Array; readonly windows: number } {
  const x = record.scaled.subarray(record.target * record.count, (record.target + 1) * record.count);
  const counts = new Int32Array(PATTERNS);
  let windows = 0;
  for (const { start, end } of record.segments)
    for (let t = start; t + (ORDER - 1) * lag < end; t++) {
      let code = 0;
      let ties = false;
      // Lehmer code: for each value, how many later ones are smaller.
      for (let i = 0; i < ORDER; i++) {
        let smaller = 0;
        for (let j = i + 1; j < ORDER; j++) {
          const difference = x[t + j * lag]! - x[t + i * lag]!;
          if (difference < 0) smaller++;
          else if (difference === 0) ties = true;
        }
        code = code * (ORDER - i) + smaller;
      }
      if (ties) continue;
      counts[code]!++;
      windows++;
    }
  return { counts, windows };
}
