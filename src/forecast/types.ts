import type { Answer } from '../base/answer.ts';

export interface LeadTimeOptions {
  /** Largest error that is still useful, in the target's unit; default half the record's standard deviation. */
  readonly tolerance?: number;
  /** Share of origins that must stay within the tolerance; 0.5 … 0.99, default 0.9. */
  readonly confidence?: number;
  /** Longest lead tried, in samples; default: chosen from the record. */
  readonly leadSteps?: number;
}

/** What sets today's limit. */
export type LeadTimeLimit = 'divergence' | 'sensor' | 'model' | 'record' | 'none-found';

/** Error of the forecast at one lead over origins the fit has not seen, in the target's unit. */
export interface LeadPoint {
  /** Lead in time units. */
  readonly lead: number;
  /** Quantiles of |error| over origins. */
  readonly median: number;
  readonly quantile90: number;
  /** Root mean square errors of ours and the references. */
  readonly rms: number;
  readonly persistence: number;
  readonly climatology: number;
  readonly linear: number;
  /** Share of origins whose whole path up to this lead stayed within the tolerance. */
  readonly within: number;
}

export interface LeadTimeResult {
  readonly tolerance: number;
  readonly confidence: number;
  /** First-exit bound of the whole forecast path held by at least `confidence` of origins, time units. */
  readonly trusted: Answer;
  /** Median first exit, time units. */
  readonly median: Answer;
  /** The same bound for states like the one the record ends in. */
  readonly now: Answer;
  /** Time units gained per decimal digit of sensor precision. */
  readonly perDecimalDigit: Answer;
  readonly limitedBy: LeadTimeLimit;
  readonly limitedByText: string;
  readonly predictor: string;
  /** Origins used. */
  readonly origins: number;
  readonly curve: readonly LeadPoint[];
  /** Predicted lead time with sensors better or worse by whole decimal digits; empty when refused. */
  readonly sensorTable: readonly {
    readonly noise: number;
    readonly trusted: number;
    readonly measured: boolean;
  }[];
}

export interface ForecastOptions extends LeadTimeOptions {
  /** Samples ahead. */
  readonly steps?: number;
}

export interface ForecastResult {
  /** Lead of each value, time units. */
  readonly time: readonly number[];
  readonly values: readonly number[];
  /** Conformal interval at `level` per lead. */
  readonly low: readonly number[];
  readonly high: readonly number[];
  readonly level: number;
  /** Time units for which the path can be trusted (as LeadTimeResult.now). */
  readonly trusted: Answer;
}
