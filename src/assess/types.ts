import type { Answer, Caution, Refusal } from '../base/answer.ts';
import type { BackendName } from '../base/kernels.ts';
import type { DivergenceCurve } from '../divergence/types.ts';
import type { NullTestResult, Regime } from '../evidence/types.ts';
import type { LeadTimeOptions, LeadTimeResult } from '../forecast/types.ts';
import type { DimensionCurve, NoiseResult } from '../geometry/types.ts';
import type { Reconstruction, ReconstructOptions } from '../reconstruct/types.ts';
import type { RecordingOptions, RecordSummary } from '../recording/types.ts';

export const ASSESSMENT_SCHEMA = 'leadspan.assessment/1';

export interface AssessOptions extends RecordingOptions, ReconstructOptions, LeadTimeOptions {
  /** Surrogates of the null test; 19 … 999, default 39. */
  readonly surrogates?: number;
  /** Leave the (decimated) record and portrait out of the result. Default: included. */
  readonly include?: { readonly record?: boolean };
  /** Seed of everything random; default 1. */
  readonly seed?: number;
}

/**
 * The answer to the main job (schema `leadspan.assessment/1`). Plain JSON. Every estimate is an `Answer`:
 * a finding with an interval, or a refusal with code, reason and remedy.
 */
export interface Assessment {
  readonly schema: typeof ASSESSMENT_SCHEMA;
  readonly record: RecordSummary;
  readonly regime: Regime;
  readonly evidence: {
    /** The surrogate test, or why it could not be made. */
    readonly nullTest: NullTestResult | Refusal;
  };
  /** Null only when the record is too poor to reconstruct at all. */
  readonly reconstruction: Reconstruction | Refusal;
  readonly exponents: {
    readonly largest: Answer;
    readonly spectrum: readonly Answer[] | Refusal;
    readonly kaplanYorke: Answer;
    readonly curve: DivergenceCurve | null;
  };
  readonly dimension: {
    readonly correlation: Answer;
    readonly entropy: Answer;
    readonly curve: DimensionCurve | null;
  };
  readonly noise: NoiseResult;
  readonly leadTime: LeadTimeResult;
  readonly mechanism: Mechanism | Refusal;
  readonly cautions: readonly Caution[];
  /** Decimated copies for figures; null with `include: { record: false }`. */
  readonly data: AssessmentData | null;
  readonly provenance: Provenance;
}

export interface Mechanism {
  readonly kind: 'stretch-and-fold' | 'tear-and-squeeze' | 'undetermined';
}

export interface AssessmentData {
  /** Target channel, at most 2,000 points of it (evenly thinned), with times; null at gaps. */
  readonly record: {
    readonly time: readonly number[];
    readonly value: readonly (number | null)[];
    readonly thinning: number;
  };
  /** x(t) against x(t + delay), at most 4,000 consecutive samples, in the target's unit. */
  readonly portrait: { readonly x: readonly number[]; readonly y: readonly number[]; readonly delay: number };
}

export interface Provenance {
  readonly version: string;
  readonly backend: BackendName;
  readonly seed: number;
  /** Options as used, defaults filled in. */
  readonly options: Readonly<Record<string, unknown>>;
  /** Hash of the input samples. */
  readonly inputHash: string;
  /** Milliseconds per stage (outside the bit-for-bit comparison, as is `backend`). */
  readonly elapsed: Readonly<Record<string, number>>;
}
