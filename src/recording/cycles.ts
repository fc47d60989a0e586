import type { QualityInput } from './quality-input.ts';

/** How fast the record moves, in samples. */

export interface Cycles {
  /** From upward crossing to upward crossing. */
  readonly count: number;
  /** Samples between the first and the last of them, gaps left out. */
  readonly samples: number;
}

/** The middle is that of each of 8 stretches: a slow trend must not hide the cycles on top of it. */
const MIDDLES = 8;

/**
 * Cycles by upward crossings of the local median with a dead band of a quarter of the interquartile range
 * to each side, so that noise near the middle is not counted (a Schmitt trigger).
 */
export function dominantCycles({ values, present }: QualityInput): Cycles {
  const count = values.length;
  const bands = Array.from({ length: MIDDLES }, (_, s) =>
    deadBand(values, present, Math.floor((s * count) / MIDDLES), Math.floor(((s + 1) * count) / MIDDLES)),
  );
  let crossings = 0;
  let low = false;
  let samples = 0;
  let sinceCrossing = 0;
  for (let i = 0; i < count; i++) {
    // Missing samples take no time: a gap hides as many cycles as samples, to a good approximation.
    if (!present[i]) continue;
    sinceCrossing++;
    const v = values[i]!;
    const band = bands[Math.floor((i * MIDDLES) / count)]!;
    if (v < band.low) low = true;
    else if (low && v > band.high) {
      low = false;
      if (crossings > 0) samples += sinceCrossing;
      crossings++;
      sinceCrossing = 0;
    }
  }
  return { count: Math.max(0, crossings - 1), samples };
}

/** Samples that fix a quartile well enough for a dead band. */
const BAND_SAMPLES = 4096;

function deadBand(values: Float64Array, present: Uint8Array, from: number, to: number) {
  const stride = Math.max(1, Math.floor((to - from) / BAND_SAMPLES));
  const sorted = new Float64Array(Math.ceil((to - from) / stride));
  let n = 0;
  let sum = 0;
  for (let i = from; i < to; i += stride)
    if (present[i]) {
      sorted[n++] = values[i]!;
      sum += values[i]!;
    }
  if (n === 0) return { low: 0, high: 0 };
  const quantiles = sorted.subarray(0, n).sort();
  const quantile = (q: number) => quantiles[Math.floor(q * (n - 1))]!;
  const width = 0.25 * (quantile(0.75) - quantile(0.25));
  if (width > 0) return { low: quantile(0.5) - width, high: quantile(0.5) + width };
  // Spikes on a flat base have no interquartile range: a level between base and spikes does instead.
  return { low: sum / n, high: sum / n };
}

/** Period of the mean frequency, 2π std / rms step (Rice 1944, Bell Syst. Tech. J. 23, 282), in samples. */
export function meanPeriod({ values, segments, std }: QualityInput): number {
  let squares = 0;
  let steps = 0;
  for (const { start, end } of segments)
    for (let i = start + 1; i < end; i++) {
      const step = (values[i]! - values[i - 1]!) / std;
      squares += step * step;
      steps++;
    }
  return squares > 0 ? 2 * Math.PI * Math.sqrt(steps / squares) : 0;
}
