import type { Answer } from '../base/answer.ts';

export interface DimensionOptions {
  /** Largest embedding dimension of the correlation sums; default 10. */
  readonly maximumDimension?: number;
  /** Reference points; default min(all, 2,000) drawn at random. */
  readonly references?: number;
}

export interface DimensionResult {
  readonly correlation: Answer;
  /** Correlation entropy K₂ in nats per time unit. */
  readonly entropy: Answer;
  readonly curve: DimensionCurve;
}

export interface DimensionCurve {
  /** Radii in the record's unit, ascending (edges with enough pairs only). */
  readonly radius: readonly number[];
  /** Per embedding dimension: log10 of the correlation sum, null where too few pairs. */
  readonly sums: readonly { readonly dimension: number; readonly log10: readonly (number | null)[] }[];
  /** Per embedding dimension: local slope at each radius, null where too few pairs. */
  readonly slopes: readonly { readonly dimension: number; readonly value: readonly (number | null)[] }[];
  /** The scaling region found, in the record's unit. */
  readonly region: { readonly low: number; readonly high: number } | null;
  /** Slope in the region by embedding dimension, and Takens' (1985) estimate. */
  readonly byDimension: readonly {
    readonly dimension: number;
    readonly slope: number | null;
    readonly takens: number | null;
  }[];
  /** Upper limit of a measurable dimension at this length (Eckmann & Ruelle 1992). */
  readonly measurableLimit: number;
}

/** The `noise` field of an Assessment: standard deviation of measurement noise, record's unit. */
export interface NoiseResult {
  readonly level: Answer;
}
