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
  const missing = counts.reduce((n, count) => (count === 0 ? n + 1 : n), 0);
  const entropy = permutationEntropy(counts, windows);
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

/**
 * Counts of the order! patterns over all windows with distinct values, by Lehmer code: 0 is ascending, the last
 * is descending.
 */
export function ordinalCounts(
  record: Pick<PreparedRecord, 'scaled' | 'count' | 'target' | 'segments'>,
  lag: number,
  order: number = ORDER,
): { readonly counts: Int32Array; readonly windows: number } {
  const x = record.scaled.subarray(record.target * record.count, (record.target + 1) * record.count);
  let patterns = 1;
  for (let i = 2; i <= order; i++) patterns *= i;
  const counts = new Int32Array(patterns);
  let windows = 0;
  for (const { start, end } of record.segments)
    for (let t = start; t + (order - 1) * lag < end; t++) {
      let code = 0;
      let ties = false;
      // Lehmer code: for each value, how many later ones are smaller.
      for (let i = 0; i < order; i++) {
        let smaller = 0;
        for (let j = i + 1; j < order; j++) {
          const difference = x[t + j * lag]! - x[t + i * lag]!;
          if (difference < 0) smaller++;
          else if (difference === 0) ties = true;
        }
        code = code * (order - i) + smaller;
      }
      if (ties) continue;
      counts[code]!++;
      windows++;
    }
  return { counts, windows };
}

/** Permutation entropy in nats: of the shares of the patterns. */
export function permutationEntropy(counts: Int32Array, windows: number): number {
  let entropy = 0;
  for (const count of counts) if (count > 0) entropy -= (count / windows) * log(count / windows);
  return entropy;
}
