import { defineTask } from '../base/compute.ts';
import { cos } from '../base/elementary.ts';

export interface SpectralLine {
  /** Cycles per sample, interpolated. */
  readonly frequency: number;
  /** Share of the variance in the line. */
  readonly share: number;
}

export interface LineSpectrum {
  /** Strongest first. */
  readonly lines: readonly SpectralLine[];
  /** Share of the variance in all lines. */
  readonly share: number;
  /** Cycles per sample between bins: frequencies are known to a tenth of it or so. */
  readonly resolution: number;
}

/** Half width of the window's main lobe, in bins. */
const LOBE = 4;
/**
 * A line stands this far above the median of its surroundings. For noise the ratio of a bin to the median
 * is −log2(u): 40 has a chance of 2^−40 per bin.
 */
const HEIGHT = 40;
/** Bins on each side that make the surroundings. */
const SURROUNDINGS = 40;
/** A line has fallen by this factor one lobe further out; a broadened peak (a resonance, weak chaos) has not. */
const SHARPNESS = 1000;

/**
 * Sharp lines of the power spectrum under the four-term Blackman–Harris window (Harris 1978, Proc. IEEE 66,
 * 51): side lobes at −92 dB, so that a strong line does not hide weak ones or look broad itself.
 */
export const lineSpectrumTask = defineTask<{ readonly values: Float64Array }, LineSpectrum>(
  'evidence.lines',
  function* (kernels, { values }) {
    const n = values.length;
    let mean = 0;
    for (const v of values) mean += v;
    mean /= n;
    const windowed = values.map((v, t) => {
      const turn = (2 * Math.PI * t) / n;
      return (v - mean) * (0.35875 - 0.48829 * cos(turn) + 0.14128 * cos(2 * turn) - 0.01168 * cos(3 * turn));
    });
    yield 0.3;
    const { real, imaginary } = kernels.realSpectrum(windowed);
    const power = real.map((re, k) => re * re + imaginary[k]! * imaginary[k]!);
    yield 0.6;
    return findLines(power, n);
  },
);

function findLines(power: Float64Array, n: number): LineSpectrum {
  let total = 0;
  for (let k = 1; k < power.length; k++) total += power[k]!;
  const lines: SpectralLine[] = [];
  for (let k = LOBE; k < power.length - LOBE; k++) {
    const height = power[k]!;
    if (!(height > 0) || height < 1e-6 * total) continue;
    let peak = true;
    for (let j = k - LOBE; j <= k + LOBE && peak; j++) peak = j === k || power[j]! < height;
    if (!peak) continue;
    const around: number[] = [];
    let skirt = 0;
    for (let j = k - SURROUNDINGS; j <= k + SURROUNDINGS; j++) {
      if (j < 1 || j >= power.length || Math.abs(j - k) <= LOBE) continue;
      around.push(power[j]!);
      if (Math.abs(j - k) <= 2 * LOBE) skirt = Math.max(skirt, power[j]!);
    }
    around.sort((a, b) => a - b);
    const median = around[around.length >> 1]!;
    // The skirt may hold noise of its own: it counts as breadth only above what the surroundings explain.
    if (height < HEIGHT * median || (height < SHARPNESS * skirt && skirt > HEIGHT * median)) continue;
    let line = 0;
    for (let j = k - LOBE; j <= k + LOBE; j++) line += power[j]!;
    // Parabola through the logarithm is exact for a Gaussian lobe, which this window's nearly is; ratios do.
    const [a, b, c] = [Math.sqrt(power[k - 1]!), Math.sqrt(height), Math.sqrt(power[k + 1]!)];
    const shift = (c - a) / (2 * (2 * b - a - c));
    lines.push({ frequency: (k + Math.max(-0.5, Math.min(0.5, shift))) / n, share: line / total });
  }
  lines.sort((x, y) => y.share - x.share || x.frequency - y.frequency);
  return {
    lines: lines.slice(0, 40),
    share: Math.min(
      1,
      lines.reduce((sum, l) => sum + l.share, 0),
    ),
    resolution: 1 / n,
  };
}

/**
 * Is every line a multiple of one base frequency? Tried are the strongest line and its fractions. Many
 * small fractions would fit anything, so at most eighths, and residuals within a quarter of a bin.
 */
export function baseFrequency(spectrum: LineSpectrum): number | null {
  const strong = spectrum.lines.filter((line) => line.share > 1e-4);
  const first = strong[0];
  if (!first) return null;
  for (let q = 1; q <= 8; q++) {
    const base = first.frequency / q;
    // Two cycles of the base must fit several times into the record, or the base is only a fit.
    if (base < 8 * spectrum.resolution) return null;
    const fits = strong.every((line) => {
      const multiple = Math.round(line.frequency / base);
      // The base's own uncertainty grows with the multiple.
      const allowed = 0.25 * spectrum.resolution * Math.max(1, multiple / q);
      return multiple >= 1 && Math.abs(line.frequency - multiple * base) <= allowed;
    });
    if (fits) return base;
  }
  return null;
}
