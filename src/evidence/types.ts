import type { MessageParameters } from '../base/answer.ts';

export type RegimeCall = 'chaotic' | 'periodic' | 'quasiperiodic' | 'noise' | 'inconclusive';

/** One piece of evidence: what was measured, against what, which way it speaks. */
export interface Reason {
  /** Stable name, e.g. `LINEAR_NULL_REJECTED`; `text` is made from it and `parameters`. */
  readonly code: string;
  readonly text: string;
  /** null where the line of evidence could not be measured. */
  readonly value: number | null;
  readonly threshold: number | null;
  readonly speaksFor: RegimeCall | 'none';
  /** Ends of the interval of `value`, where it has one. */
  readonly interval?: readonly [number, number];
  /** What this piece of evidence takes for granted, or cannot see. */
  readonly assumes?: string;
  readonly parameters?: MessageParameters;
}

export interface Regime {
  readonly call: RegimeCall;
  /** 0 … 1; of calls made at 0.9, nine in ten are meant to be right. For `inconclusive`: confidence that no call can be made. */
  readonly confidence: number;
  readonly reasons: readonly Reason[];
}

export interface NullTestOptions {
  /** Surrogates; default 39 (smallest p 0.025). At least 19. */
  readonly surrogates?: number;
}

/** Result of a surrogate test. */
export interface NullTestResult {
  readonly nullHypothesis: string;
  readonly statistic: string;
  readonly record: number;
  /** Statistic of each surrogate, in order of their number. */
  readonly surrogates: readonly number[];
  /** One-sided rank p-value, (1 + number at least as extreme) / (surrogates + 1). */
  readonly pValue: number;
  /** Level at which `rejected` is decided. */
  readonly level: number;
  readonly rejected: boolean;
  readonly method: string;
  /**
   * A second statistic, the skewness of differences (zero but for chance when time has no direction), with
   * its two-sided rank p-value. It does not enter `rejected`, whose level is that of one test; a direction
   * of time forbids a call of noise.
   */
  readonly asymmetry: {
    readonly record: number;
    readonly surrogates: readonly number[];
    readonly pValue: number;
  };
  /** Samples used after the ends were trimmed to match (start, count of the trimmed stretch). */
  readonly stretch: { readonly start: number; readonly count: number };
}
