/*
 * All predictors have one interface: (setting, structure, origins, leads) → forecasts of the target in scaled
 * units, row-major origins × leads, as generators that run in slices. `predictTask` picks by `kind`.
 */

/**
 * A predictor's structure, plain data. `step` 0 forecasts each lead directly; a positive step forecasts
 * that many samples at a time and feeds them back (iterated).
 */
export type PredictorSpec =
  | { readonly kind: 'climatology' }
  | { readonly kind: 'persistence' }
  | { readonly kind: 'linear' }
  | {
      readonly kind: 'local';
      /** 0: mean of the neighbours' futures. 1: linear map fitted to them. */
      readonly order: 0 | 1;
      readonly neighbours: number;
      readonly ridge: number;
      readonly step: number;
    }
  | { readonly kind: 'polynomial'; readonly degree: number; readonly ridge: number; readonly step: number };

/** State space, library and exclusions that every predictor of one record shares. Plain data. */
export interface ForecastSetting {
  /** Channels end to end, scaled to mean 0 and standard deviation 1. */
  readonly data: Float64Array;
  /** 1 where every channel has a sample. */
  readonly present: Uint8Array;
  readonly count: number;
  readonly channels: number;
  /** Channel forecast. */
  readonly target: number;
  /** Delay coordinates, as `delayVectors` gives them: c·count − lag. */
  readonly offsets: Int32Array;
  /** Times of the library's vectors: past and `reach` samples ahead are present, ascending. */
  readonly library: Int32Array;
  /** Samples after a library vector that are known to be present. */
  readonly reach: number;
  /**
   * Library vectors with |t − origin| ≤ exclusion are not used: at least span + reach, so that none shares
   * a sample with the past or the future path of the origin, plus the decorrelation window (h-block
   * cross-validation: Burman, Chow & Nolan 1994, Biometrika 81, 351).
   */
  readonly exclusion: number;
  /**
   * Edges of the time blocks for global fits (K + 1): origins of a block are forecast by a fit to the
   * samples outside the block and its exclusion. Empty: one fit to everything, for forecasts after the end.
   */
  readonly foldEdges: readonly number[];
  /** Samples between coordinates. */
  readonly delay: number;
}

/** Samples before a vector's time that its coordinates use. */
export function spanOf(setting: Pick<ForecastSetting, 'offsets' | 'count'>): number {
  let span = 0;
  for (const offset of setting.offsets) span = Math.max(span, lagOf(offset, setting.count));
  return span;
}

/** Channel of a coordinate: offset = channel·count − lag with 0 ≤ lag < count. */
export function channelOf(offset: number, count: number): number {
  return Math.max(0, Math.ceil(offset / count));
}

export function lagOf(offset: number, count: number): number {
  return channelOf(offset, count) * count - offset;
}

/** The structure in words, for results. */
export function describePredictor(spec: PredictorSpec): string {
  const mode = (step: number) =>
    step === 0 ? 'each lead directly' : `iterated by ${step} sample${step === 1 ? '' : 's'}`;
  switch (spec.kind) {
    case 'climatology':
      return "climatology (the record's mean)";
    case 'persistence':
      return 'persistence (no change)';
    case 'linear':
      return 'linear autoregression, iterated';
    case 'local':
      return `locally ${spec.order === 1 ? 'linear' : 'constant'}, ${spec.neighbours} neighbours${spec.order === 1 ? `, ridge ${spec.ridge}` : ''}, ${mode(spec.step)}`;
    case 'polynomial':
      return `polynomial autoregression of degree ${spec.degree} on the delays, ridge ${spec.ridge}, ${mode(spec.step)}`;
  }
}

/** Predictors that fit the whole library at once; the others search it for each origin. */
export function isGlobal(spec: PredictorSpec): boolean {
  return spec.kind !== 'local';
}

/** Persistence: the latest value stays. */
export function persistence(setting: ForecastSetting, origins: Int32Array, leads: Int32Array): Float64Array {
  const out = new Float64Array(origins.length * leads.length);
  for (let i = 0; i < origins.length; i++) {
    const latest = setting.data[setting.target * setting.count + origins[i]!]!;
    out.fill(latest, i * leads.length, (i + 1) * leads.length);
  }
  return out;
}

/**
 * Climatology: the mean of the whole record, 0 in scaled units. It knows the origin's own future a little,
 * in the reference's favour.
 */
export function climatology(_setting: ForecastSetting, origins: Int32Array, leads: Int32Array): Float64Array {
  return new Float64Array(origins.length * leads.length);
}
