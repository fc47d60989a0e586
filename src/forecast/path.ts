import { channelOf, type ForecastSetting, lagOf, spanOf } from './predictors.ts';

/**
 * Past and forecast samples of a batch of origins, for predictors that feed their forecasts back: a delay
 * vector's coordinates come from the record up to the origin and from the forecast after it.
 */
export class Paths {
  readonly #setting: ForecastSetting;
  readonly #origins: Int32Array;
  readonly #span: number;
  readonly #width: number;
  readonly #values: Float64Array;
  readonly #low: Float64Array;
  readonly #high: Float64Array;
  readonly #channels: Int32Array;
  readonly #lags: Int32Array;

  /** @param steps samples ahead that will be written at most */
  constructor(setting: ForecastSetting, range: ValueRange, origins: Int32Array, steps: number) {
    this.#setting = setting;
    this.#origins = origins;
    this.#span = spanOf(setting);
    this.#width = this.#span + 1 + steps;
    this.#low = range.low;
    this.#high = range.high;
    this.#channels = setting.offsets.map((o) => channelOf(o, setting.count));
    this.#lags = setting.offsets.map((o) => lagOf(o, setting.count));
    const { channels, count, data } = setting;
    this.#values = new Float64Array(origins.length * channels * this.#width);
    for (let i = 0; i < origins.length; i++) {
      for (let c = 0; c < channels; c++) {
        const from = c * count + origins[i]! - this.#span;
        const row = this.#row(i, c);
        for (let k = 0; k <= this.#span; k++) this.#values[row + k] = data[from + k]!;
      }
    }
  }

  /** Delay vectors of all paths `lead` samples after their origins, row-major. */
  coordinates(lead: number): Float64Array {
    const m = this.#lags.length;
    const out = new Float64Array(this.#origins.length * m);
    for (let i = 0; i < this.#origins.length; i++) {
      for (let d = 0; d < m; d++)
        out[i * m + d] = this.#values[this.#row(i, this.#channels[d]!) + this.#span + lead - this.#lags[d]!]!;
    }
    return out;
  }

  /**
   * Sets a forecast sample. A path that has left the range the record ever took (widened by a tenth) is
   * held at its edge, so that an unstable fit gives a bad forecast rather than an infinite one.
   */
  set(origin: number, channel: number, lead: number, value: number): void {
    const kept = Math.min(this.#high[channel]!, Math.max(this.#low[channel]!, value));
    this.#values[this.#row(origin, channel) + this.#span + lead] = Number.isNaN(kept) ? 0 : kept;
  }

  get(origin: number, channel: number, lead: number): number {
    return this.#values[this.#row(origin, channel) + this.#span + lead]!;
  }

  /** The target at `leads`, row-major origins × leads. */
  targets(leads: Int32Array): Float64Array {
    const out = new Float64Array(this.#origins.length * leads.length);
    for (let i = 0; i < this.#origins.length; i++)
      for (let l = 0; l < leads.length; l++)
        out[i * leads.length + l] = this.get(i, this.#setting.target, leads[l]!);
    return out;
  }

  #row(origin: number, channel: number): number {
    return (origin * this.#setting.channels + channel) * this.#width;
  }
}

/** Smallest and largest value a forecast may take, per channel. */
export interface ValueRange {
  readonly low: Float64Array;
  readonly high: Float64Array;
}

/** Range of each channel of the record, widened by a tenth of its width at both ends. */
export function valueRange(setting: ForecastSetting): ValueRange {
  const { data, present, count, channels } = setting;
  const low = new Float64Array(channels).fill(Number.POSITIVE_INFINITY);
  const high = new Float64Array(channels).fill(Number.NEGATIVE_INFINITY);
  for (let c = 0; c < channels; c++) {
    for (let t = 0; t < count; t++) {
      if (present[t] === 0) continue;
      const x = data[c * count + t]!;
      if (x < low[c]!) low[c] = x;
      if (x > high[c]!) high[c] = x;
    }
    const margin = 0.1 * (high[c]! - low[c]!);
    low[c] = low[c]! - margin;
    high[c] = high[c]! + margin;
  }
  return { low, high };
}
