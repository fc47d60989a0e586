import type { DelayVectors } from '../base/kernels.ts';

export interface ReconstructOptions {
  /** Delay in samples; default: chosen. */
  readonly delay?: number;
  /** Coordinates per channel; default: chosen. */
  readonly embeddingDimension?: number;
  /** Decorrelation (Theiler) window in samples; default: chosen; never below (m − 1)·delay. */
  readonly theilerWindow?: number;
  /** 'map': successive samples are iterates. 'auto' decides from the sampling (default). */
  readonly dynamics?: 'auto' | 'flow' | 'map';
}

/** How state space is rebuilt from the record. Plain data; delay vectors are computed where used. */
export interface Reconstruction {
  readonly delay: { readonly samples: number; readonly time: number; readonly method: string };
  /** Coordinates in all: delays per channel × channels. */
  readonly embeddingDimension: number;
  readonly delaysPerChannel: number;
  readonly theilerWindow: { readonly samples: number; readonly time: number; readonly method: string };
  readonly dynamics: 'flow' | 'map';
  /** Samples per characteristic time (1/e point or first minimum): 1 for maps. */
  readonly correlationTime: { readonly samples: number; readonly time: number };
  /** Number of complete delay vectors. */
  readonly vectors: number;
  readonly curves: ReconstructionCurves;
}

export interface ReconstructionCurves {
  /** Average mutual information in bits by lag in samples (Fraser & Swinney 1986). */
  readonly mutualInformation: { readonly lag: readonly number[]; readonly bits: readonly number[] };
  readonly autocorrelation: { readonly lag: readonly number[]; readonly value: readonly number[] };
  /** Share of false neighbours by dimension (Kennel et al. 1992); null where too few could be judged. */
  readonly falseNeighbours: {
    readonly dimension: readonly number[];
    readonly fraction: readonly (number | null)[];
    readonly judged: readonly number[];
  };
  /** Cao's E1 and E2 by dimension (Cao 1997). */
  readonly cao: {
    readonly dimension: readonly number[];
    readonly e1: readonly number[];
    readonly e2: readonly number[];
  };
  /** Candidates tried and their out-of-sample forecast error relative to the standard deviation. */
  readonly candidates: readonly {
    readonly delay: number;
    readonly dimension: number;
    readonly error: number;
  }[];
  /** Space–time separation: median distance (in std) by time separation in samples (Provenzale et al. 1992). */
  readonly separation: { readonly lag: readonly number[]; readonly median: readonly number[] };
}

/**
 * Delay vectors of a record (see `delayVectors` in vectors.ts): backward delays, so the last coordinate
 * read is never later than the vector's time. `starts` are times of the *latest* sample, `offsets` are
 * c·count − k·delay for channel c and k = 0 … delaysPerChannel − 1 (most recent first).
 */
export type RecordVectors = DelayVectors;
