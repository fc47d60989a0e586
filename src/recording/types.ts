import type { Answer, Caution } from '../base/answer.ts';

/** Sample types taken; the caller's buffers are never changed or detached. */
export type Samples = Float64Array | Float32Array | Int16Array | readonly number[];

/** A measured record as the caller hands it in. */
export interface Recording {
  /** One channel, or an array of channels of equal length. NaN marks a missing sample; infinities are bad input. */
  readonly samples: Samples | readonly Samples[];
  /** Time units per sample. Needed unless `times` gives it. */
  readonly interval?: number;
  /** Unit of the samples, e.g. 'K'. Default: '' (unknown). */
  readonly unit?: string;
  /** Unit of `interval` and of all times. Default 's'. */
  readonly timeUnit?: string;
  readonly name?: string;
  /** Smallest step of the acquisition (quantiser) in the samples' unit, if known. */
  readonly resolution?: number;
  /** Standard deviation of the sensor's noise in the samples' unit, if known. */
  readonly sensorNoise?: number;
  /** Time of each sample: checked against `interval`, or gives it. */
  readonly times?: Samples;
  /** Channel to forecast and to judge; default 0. */
  readonly target?: number;
  /** Unit of each channel, where they differ from `unit`. */
  readonly channelUnits?: readonly string[];
}

export interface RecordingOptions {
  /** 'linear' interpolates jittered time stamps onto an even grid. Default: refuse them. */
  readonly resample?: 'linear';
  /** 'linear' subtracts a straight line from each channel. Default 'none'. */
  readonly detrend?: 'none' | 'linear';
}

/** A run of samples with no missing one in any channel: [start, end). */
export interface Segment {
  readonly start: number;
  readonly end: number;
}

/** Is the record clipped, stuck, constant, coarse? Descriptive; the codes say what to do. */
export interface RecordQuality {
  /** Share of samples at the two extreme values. */
  readonly saturatedFraction: number;
  /** Longest run of identical values, in samples. */
  readonly longestRun: number;
  readonly distinctValues: number;
  /** Samples per dominant cycle (from the mean frequency of crossings of the median), null if none. */
  readonly samplesPerCycle: number | null;
  /**
   * What is wrong with the record. Entries whose code is a `RefusalCode` (CONSTANT, TOO_SHORT, STUCK, SATURATED,
   * NOISE_FLOOR) block the analysis (`blockingProblem`); the others (CLIPPED_BRIEFLY, STUCK_BRIEFLY,
   * BOUNDED_BY_ZERO, OVERSAMPLED, CHANNEL_CONSTANT) are remarks.
   */
  readonly problems: readonly Caution[];
}

/** A validated record, plain data, sendable to workers. Made by `prepareRecording`. */
export interface PreparedRecord {
  readonly name: string;
  readonly count: number;
  readonly interval: number;
  readonly timeUnit: string;
  readonly channelUnits: readonly string[];
  readonly target: number;
  readonly channelCount: number;
  /** Channels end to end, (x − mean) / std, 0 at missing samples. Length channelCount · count. */
  readonly scaled: Float64Array;
  /** 1 where every channel has a sample. Length count. */
  readonly present: Uint8Array;
  readonly segments: readonly Segment[];
  /** Per channel, in the channel's unit (two-pass). */
  readonly means: readonly number[];
  readonly stds: readonly number[];
  readonly missing: number;
  /** Quantiser step of the target in its unit, 0 when none is found. */
  readonly resolutionStep: number;
  readonly resolutionSource: 'given' | 'found' | 'none-found';
  /** Sensor noise given by the caller, else null. */
  readonly givenNoise: number | null;
  readonly quality: RecordQuality;
  /** FNV-1a 64-bit hash of the samples' bytes and the interval, hexadecimal. */
  readonly hash: string;
  /** What was done to the samples before the analysis, in words; empty when nothing. */
  readonly treatments: readonly string[];
}

/** Does the record keep its character? */
export interface Stationarity {
  readonly verdict: 'stationary' | 'drifting' | 'undecided';
  /** Parts compared. */
  readonly parts: number;
  /** Mean and standard deviation of the target in each part, in its unit. */
  readonly means: readonly number[];
  readonly stds: readonly number[];
  /** p-values of the tests of equal means and equal spread between parts (block-permuted). */
  readonly meanPValue: number;
  readonly spreadPValue: number;
  /**
   * Schreiber 1997: error of forecasting part j from part i relative to forecasting it from itself,
   * row-major parts × parts; and the permutation p-value of its excess.
   */
  readonly crossErrors: readonly number[];
  readonly crossPValue: number;
  readonly text: string;
}

/** The `record` field of an Assessment. */
export interface RecordSummary {
  readonly name: string;
  readonly count: number;
  readonly channels: number;
  readonly target: number;
  readonly interval: number;
  readonly timeUnit: string;
  readonly unit: string;
  readonly mean: number;
  readonly std: number;
  readonly resolution: {
    readonly step: number;
    readonly source: 'given' | 'found' | 'none-found';
    /** Standard deviation of the quantiser's rounding, step / √12 (IEEE Std 1241). */
    readonly quantisationNoise: number;
    /** Effective bits that rounding alone would leave: log2(std·√12 / step) for a step > 0, else null. */
    readonly effectiveBits: number | null;
  };
  /** Given by the caller, or estimated (`noise.level` repeats the estimate). */
  readonly sensorNoise: Answer;
  /** Missing samples and runs of them. */
  readonly gaps: { readonly missing: number; readonly runs: number };
  readonly segments: readonly Segment[];
  readonly saturatedFraction: number;
  readonly quality: RecordQuality;
  readonly stationarity: Stationarity;
  readonly treatments: readonly string[];
}
