import type { Segment } from './types.ts';

/** What the quality of a record is judged from. */
export interface QualityInput {
  /** The target, in units where nothing overflows (see `prepareRecording`); read where `present`. */
  readonly values: Float64Array;
  readonly present: Uint8Array;
  readonly segments: readonly Segment[];
  /** Present values, ascending. */
  readonly sorted: Float64Array;
  readonly std: number;
  /** Step of the value lattice in the same units, 0 when none. */
  readonly step: number;
  readonly constant: boolean;
  readonly flatChannels: readonly number[];
}
