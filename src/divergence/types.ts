import type { Answer } from '../base/answer.ts';

export interface DivergenceOptions {
  /** Reference points; default min(all, 4,000), evenly spread. */
  readonly references?: number;
  /** Steps followed; default: until the curve is flat. */
  readonly steps?: number;
}

export interface DivergenceResult {
  /** Largest Lyapunov exponent, 1 / time unit (per step for maps: interval = 1). */
  readonly largest: Answer;
  readonly curve: DivergenceCurve;
}

/** Growth of small differences. */
export interface DivergenceCurve {
  /** Lead in time units. */
  readonly time: readonly number[];
  /** Mean ln distance of nearest-neighbour pairs, distances in the record's unit (Rosenstein et al. 1993). */
  readonly nearest: readonly number[];
  /** ln of mean distance over neighbourhoods (Kantz 1994), same unit. */
  readonly neighbourhood: readonly (number | null)[];
  /** The straight part used: lead range, slope in 1 / time unit, value at lead 0. */
  readonly fit: {
    readonly from: number;
    readonly to: number;
    readonly slope: number;
    readonly intercept: number;
  } | null;
  /** ln of the typical distance between unrelated states: where growth must stop. */
  readonly ceiling: number;
}
