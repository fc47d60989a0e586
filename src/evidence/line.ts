import type { Reason } from './types.ts';

/** What every line of evidence hands to the rule in `regime.ts`. */
export interface EvidenceLine {
  readonly reasons: readonly Reason[];
}

/** A line that was looked at and speaks neither way. */
export function neutral(code: string, text: string): Reason {
  return { code, text, value: null, threshold: null, speaksFor: 'none' };
}

/** Three significant digits, for messages. */
export const short = (value: number) => String(Number(value.toPrecision(3)));
