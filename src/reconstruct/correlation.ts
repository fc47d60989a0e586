import { defineTask } from '../base/compute.ts';
import { log } from '../base/elementary.ts';
import type { Kernels } from '../base/kernels.ts';

export interface CorrelationTaskInput {
  /** The target, zero mean and unit variance, 0 at missing samples. */
  readonly series: Float64Array;
  readonly present: Uint8Array;
}

export interface CorrelationCurves {
  /** Autocorrelation at lags 0 … length − 1. */
  readonly autocorrelation: Float64Array;
  /** First lag at which it is below 1/e; the largest lag computed when it never is. */
  readonly decayLag: number;
  readonly decayed: boolean;
  /** Average mutual information at some lags, nats, corrected for bias. */
  readonly mutualInformation: {
    readonly lags: Int32Array;
    readonly nats: Float64Array;
    readonly errors: Float64Array;
  };
  readonly bins: number;
}

/** Pieces transformed at once: with 2^14 samples one transform takes a few milliseconds on every backend. */
const PIECE = 16_384;
/** Samples that enter the mutual information: 32² cells then hold 64 each, a relative error of 12 %. */
const MOST_PAIRS = 65_536;
const MOST_LAGS = 100;
/** Mutual information is followed to this many decay lags: first minima lie within one or two. */
const DECAY_LAGS = 4;

/** Autocorrelation and average mutual information of one channel. */
export const correlationTask = defineTask(
  'reconstruct.correlation',
  function* (
    kernels: Kernels,
    { series, present }: CorrelationTaskInput,
  ): Generator<number, CorrelationCurves, void> {
    const autocorrelation = yield* autocorrelations(kernels, series, present);
    const decay = autocorrelation.findIndex((r) => r < EXP_MINUS_ONE);
    const decayLag = decay < 0 ? autocorrelation.length - 1 : Math.max(1, decay);
    const farthest = Math.max(
      1,
      Math.min(Math.max(16, DECAY_LAGS * decayLag), Math.floor(series.length / 10)),
    );
    const stride = Math.ceil(farthest / MOST_LAGS);
    const lags = Int32Array.from(
      new Set([1, ...Array.from({ length: Math.floor(farthest / stride) }, (_, i) => (i + 1) * stride)]),
    );
    const { nats, errors, bins } = yield* mutualInformation(kernels, series, present, lags);
    return {
      autocorrelation,
      decayLag,
      decayed: decay >= 0,
      mutualInformation: { lags, nats, errors },
      bins,
    };
  },
);

/** 1/e: the usual end of a correlation. */
export const EXP_MINUS_ONE = 0.36787944117144233;

/**
 * Σ x_t x_{t+l} over pairs that are both present, divided by their number, by the Wiener–Khinchin relation
 * (zero-padded, so nothing wraps around). Long records are cut into pieces, whose sums are added.
 */
function* autocorrelations(kernels: Kernels, series: Float64Array, present: Uint8Array) {
  const n = series.length;
  const piece = Math.min(n, PIECE);
  const lags = Math.max(1, Math.floor(Math.min(n / 4, PIECE / 2)));
  let size = 2;
  while (size < piece + lags) size *= 2;
  const sums = new Float64Array(lags + 1);
  const counts = new Float64Array(lags + 1);
  for (let from = 0; from < n; from += PIECE) {
    const to = Math.min(from + PIECE, n);
    addSelfProducts(kernels, series.subarray(from, to), size, sums);
    const mask = present.subarray(from, to);
    if (mask.includes(0)) {
      // Counts are whole numbers: rounding takes the transform's rounding away.
      const pairs = new Float64Array(lags + 1);
      addSelfProducts(kernels, Float64Array.from(mask), size, pairs);
      for (let l = 0; l <= lags; l++) counts[l]! += Math.round(pairs[l]!);
    } else for (let l = 0; l <= lags; l++) counts[l]! += Math.max(0, to - from - l);
    yield (0.5 * to) / n;
  }
  const variance = sums[0]! / Math.max(1, counts[0]!);
  const out = new Float64Array(lags + 1);
  for (let l = 0; l <= lags; l++)
    out[l] = counts[l]! > 0 && variance > 0 ? sums[l]! / counts[l]! / variance : 0;
  return out;
}

function addSelfProducts(kernels: Kernels, values: Float64Array, size: number, sums: Float64Array): void {
  const padded = new Float64Array(size);
  padded.set(values);
  const { real, imaginary } = kernels.realSpectrum(padded);
  const power = new Float64Array(real.length);
  for (let k = 0; k < power.length; k++) power[k] = real[k]! * real[k]! + imaginary[k]! * imaginary[k]!;
  const products = kernels.realSeries({ real: power, imaginary: new Float64Array(power.length) }, size);
  for (let l = 0; l < sums.length; l++) sums[l]! += products[l]!;
}

/**
 * Average mutual information (Fraser & Swinney 1986, Phys. Rev. A 33, 1134) over equal-probability bins.
 * Bias of occupied cells and the error of independent pairs after Roulston 1999 (Physica D 125, 285).
 */
function* mutualInformation(kernels: Kernels, series: Float64Array, present: Uint8Array, lags: Int32Array) {
  const farthest = lags[lags.length - 1]!;
  const windows = evenWindows(series.length, farthest);
  const used = new Uint8Array(series.length);
  let samples = 0;
  for (const { from, to } of windows)
    for (let i = from; i < to; i++)
      if (present[i]) {
        used[i] = 1;
        samples++;
      }
  const bins = binsFor(samples);
  const symbols = rankSymbols(series, used, bins);
  const nats = new Float64Array(lags.length);
  const errors = new Float64Array(lags.length);
  const chunk = 8;
  for (let from = 0; from < lags.length; from += chunk) {
    const part = lags.slice(from, from + chunk);
    const counts = new Float64Array(part.length * bins * bins);
    for (const w of windows) {
      const more = kernels.jointCounts({ symbols: symbols.slice(w.from, w.to), bins, lags: part });
      for (let i = 0; i < counts.length; i++) counts[i]! += more[i]!;
    }
    for (let l = 0; l < part.length; l++) {
      const table = counts.subarray(l * bins * bins, (l + 1) * bins * bins);
      const { information, error } = tableInformation(table, bins);
      nats[from + l] = information;
      errors[from + l] = error;
    }
    yield 0.5 + (0.5 * from) / lags.length;
  }
  return { nats, errors, bins };
}

/** At most 8 windows of MOST_PAIRS samples in all, each at least 16 times the longest lag, evenly spread. */
function evenWindows(n: number, farthest: number): { from: number; to: number }[] {
  if (n <= MOST_PAIRS) return [{ from: 0, to: n }];
  const number = Math.max(1, Math.min(8, Math.floor(MOST_PAIRS / (16 * farthest))));
  const length = Math.floor(MOST_PAIRS / number);
  return Array.from({ length: number }, (_, w) => {
    const from = number === 1 ? 0 : Math.floor((w * (n - length)) / (number - 1));
    return { from, to: from + length };
  });
}

/** Five expected pairs to a cell (Cochran 1954, Biometrics 10, 417), between 4 and 32 bins. */
export function binsFor(samples: number): number {
  return Math.max(4, Math.min(32, Math.floor(Math.sqrt(samples / 5))));
}

/**
 * Equal-probability bin of each sample from its rank; equal values share the middle of their ranks, so that
 * a coarse quantiser's ties are not torn apart at random. 255 where not used.
 */
export function rankSymbols(series: Float64Array, used: Uint8Array, bins: number): Uint8Array {
  const gathered = new Float64Array(series.length);
  let n = 0;
  for (let i = 0; i < series.length; i++) if (used[i]) gathered[n++] = series[i]!;
  const sorted = gathered.subarray(0, n).sort();
  // Bin edges by value: the bin of a value is found by where its tied ranks' middle falls.
  const values: number[] = [];
  const symbolOf: number[] = [];
  for (let i = 0; i < n; ) {
    let j = i + 1;
    while (j < n && sorted[j] === sorted[i]) j++;
    const symbol = Math.min(bins - 1, Math.floor((bins * (i + j)) / (2 * n)));
    // Only the first value of each bin is kept: later ones of the same bin need no edge.
    if (symbolOf.length === 0 || symbolOf[symbolOf.length - 1] !== symbol) {
      values.push(sorted[i]!);
      symbolOf.push(symbol);
    }
    i = j;
  }
  const symbols = new Uint8Array(series.length).fill(255);
  for (let i = 0; i < series.length; i++) {
    if (!used[i]) continue;
    let low = 0;
    let high = values.length - 1;
    while (low < high) {
      const middle = (low + high + 1) >> 1;
      if (values[middle]! <= series[i]!) low = middle;
      else high = middle - 1;
    }
    symbols[i] = symbolOf[low]!;
  }
  return symbols;
}

/** Mutual information in nats of a joint histogram, corrected for bias, and its standard error. */
export function tableInformation(table: Float64Array, bins: number): { information: number; error: number } {
  const rows = new Float64Array(bins);
  const columns = new Float64Array(bins);
  let n = 0;
  for (let a = 0; a < bins; a++)
    for (let b = 0; b < bins; b++) {
      const count = table[a * bins + b]!;
      rows[a]! += count;
      columns[b]! += count;
      n += count;
    }
  if (n === 0) return { information: 0, error: 0 };
  let sum = 0;
  let squares = 0;
  let cells = 0;
  for (let a = 0; a < bins; a++)
    for (let b = 0; b < bins; b++) {
      const count = table[a * bins + b]!;
      if (count === 0) continue;
      cells++;
      const term = log((count * n) / (rows[a]! * columns[b]!));
      sum += (count / n) * term;
      squares += (count / n) * term * term;
    }
  const filled = (marginal: Float64Array) => marginal.reduce((k, count) => k + (count > 0 ? 1 : 0), 0);
  const [x, y] = [filled(rows), filled(columns)];
  const information = sum - (cells - x - y + 1) / (2 * n);
  // At independence the first-order variance vanishes; 2nI is then χ² with (x − 1)(y − 1) degrees of freedom.
  const independent = Math.sqrt(((x - 1) * (y - 1)) / 2) / n;
  return { information, error: Math.max(independent, Math.sqrt(Math.max(0, squares - sum * sum) / n)) };
}
