import { defineTask } from '../base/compute.ts';
import { cos, log, sin } from '../base/elementary.ts';
import type { Kernels } from '../base/kernels.ts';

export interface SpectralLine {
  /** Cycles per sample. */
  readonly frequency: number;
  /** Share of the variance. */
  readonly share: number;
  /** Power left around the line after it was taken out, relative to the line: a sharp one leaves only the background. */
  readonly skirt: number;
}

export interface LineSpectrum {
  /** Sharp lines, strongest first. */
  readonly lines: readonly SpectralLine[];
  /** Share of the variance in sharp lines. */
  readonly share: number;
  /** Share of peaks that rise above the background but are broad: resonances, diffusing phases. */
  readonly broadShare: number;
  /** What is left when the sharp lines are taken out; same length as the input. */
  readonly residual: Float64Array;
}

/** Lines looked for at most: a relaxation oscillation shows a dozen harmonics above a thousandth. */
const MOST_LINES = 48;
/** Half width, in bins, of the main lobe of the window (Hann: 2) and of the surroundings a line is judged in. */
const LOBE = 3;
const SURROUNDINGS = 40;
/** Bins on each side that are next to the lobe. */
const NEXT_BINS = 8;
/** The chance that noise raises one of its bins to a line anywhere in the spectrum (Fisher 1929, Proc. R. Soc. A 125, 54). */
const FALSE_LINE = 1e-3;
/** Fewer cycles in the record than this cannot show that a line is sharp, and slow noise makes peaks there. */
const FEWEST_CYCLES = 8;
/** Weaker lines than this do not matter. */
const LEAST_SHARE = 1e-6;
/**
 * A line of constant frequency and amplitude leaves nothing in its own lobe; one whose phase or amplitude
 * wanders within the record leaves a part that grows with the wandering: 5 % is a phase of about 0.2 rad.
 */
const SHARP = 0.05;

/**
 * Sharp lines by successive refinement: find the strongest peak under a Hann window, refine its frequency,
 * take it out, go on (Laskar 1990, Icarus 88, 266). The fitted sinusoids are then refined once more, each
 * with the others taken out.
 */
export const spectralLinesTask = defineTask(
  'evidence.spectral-lines',
  function* (
    kernels: Kernels,
    { values }: { readonly values: Float64Array },
  ): Generator<number, LineSpectrum, void> {
    const n = values.length;
    const length = smoothAtLeast(n);
    const window = Float64Array.from({ length: n }, (_, t) => 1 - cos((2 * Math.PI * (t + 0.5)) / n));
    const residual = new Float64Array(n);
    let mean = 0;
    for (let t = 0; t < n; t++) mean += values[t]! / n;
    for (let t = 0; t < n; t++) residual[t] = values[t]! - mean;
    let variance = 0;
    for (let t = 0; t < n; t++) variance += (residual[t]! * residual[t]!) / n;
    yield 0;
    const bins = n / length;
    const found: Sinusoid[] = [];
    const broad: Sinusoid[] = [];
    const threshold = log(length / 2 / FALSE_LINE);
    for (let tries = 0; found.length < MOST_LINES && tries < MOST_LINES + 8; tries++) {
      const power = windowedPower(kernels, residual, window, length);
      yield tries / MOST_LINES;
      // Broad peaks stay in the residual: their bins are not looked at again.
      const at = strongest(power, broad, length);
      if (at < 0) break;
      const half = LOBE / bins;
      if (power[at]! < threshold * background(power, at, half)) break;
      const raised = power[at]! >= threshold * nextLevel(power, at, half);
      const line = refine(residual, window, at / length, 0.5 / n);
      if ((line.amplitude * line.amplitude) / 2 < LEAST_SHARE * variance) break;
      const before = localPower(power, at, half);
      subtract(residual, line, 1);
      const after = localPower(windowedPower(kernels, residual, window, length), at, half);
      const surroundings = background(power, at, half) * (2 * Math.ceil(half) + 1);
      const skirt = Math.max(0, after - 3 * surroundings) / before;
      if (
        !raised ||
        skirt > SHARP ||
        found.some((other) => Math.abs(other.frequency - line.frequency) < (2 * LOBE) / n)
      ) {
        subtract(residual, line, -1);
        broad.push(line);
        if (broad.length > 4) break;
      } else found.push({ ...line, skirt });
    }
    // Second pass: neighbours no longer pull at each other.
    for (let i = 0; i < found.length; i++) {
      const line = found[i]!;
      subtract(residual, line, -1);
      found[i] = { ...refine(residual, window, line.frequency, 0.25 / n), skirt: line.skirt };
      subtract(residual, found[i]!, 1);
      if (i % 4 === 3) yield 1;
    }
    let left = 0;
    for (let t = 0; t < n; t++) left += (residual[t]! * residual[t]!) / n;
    const shareOf = (line: Sinusoid) => (variance > 0 ? (line.amplitude * line.amplitude) / 2 / variance : 0);
    const lines = found
      .map((line) => ({ frequency: line.frequency, share: shareOf(line), skirt: line.skirt }))
      .sort((a, b) => b.share - a.share || a.frequency - b.frequency);
    return {
      lines,
      share: variance > 0 ? Math.max(0, Math.min(1, 1 - left / variance)) : 0,
      broadShare: broad.reduce((sum, line) => sum + shareOf(line), 0),
      residual,
    };
  },
);

interface Sinusoid {
  readonly frequency: number;
  readonly amplitude: number;
  readonly phase: { readonly cos: number; readonly sin: number };
  readonly skirt: number;
}

/** Smallest 2^a·3^b·5^c of at least n: zero padding only makes the grid of frequencies finer. */
function smoothAtLeast(n: number): number {
  for (let length = n + (n % 2); ; length += 2) {
    let rest = length;
    for (const prime of [2, 3, 5]) while (rest % prime === 0) rest /= prime;
    if (rest === 1) return length;
  }
}

function windowedPower(
  kernels: Kernels,
  x: Float64Array,
  window: Float64Array,
  length: number,
): Float64Array {
  const padded = new Float64Array(length);
  for (let t = 0; t < x.length; t++) padded[t] = x[t]! * window[t]!;
  const { real, imaginary } = kernels.realSpectrum(padded);
  return real.map((re, k) => re * re + imaginary[k]! * imaginary[k]!);
}

/** Bin of the largest power outside the neighbourhoods of broad peaks; −1 when there is none. */
function strongest(power: Float64Array, broad: readonly Sinusoid[], length: number): number {
  let best = -1;
  for (let k = FEWEST_CYCLES; k < power.length; k++) {
    if (best >= 0 && power[k]! <= power[best]!) continue;
    if (broad.some((line) => Math.abs(k - line.frequency * length) <= SURROUNDINGS)) continue;
    best = k;
  }
  return best >= 0 && power[best]! > 0 ? best : -1;
}

/**
 * Mean level of the surroundings, from the median (of an exponential distribution: mean · ln 2) of the higher
 * side: on the slope of red noise the lower side makes every bin look like a peak.
 */
function background(power: Float64Array, at: number, half: number): number {
  const sides = [[-1], [1]].map((side) => median(power, at, side, half, SURROUNDINGS));
  return Math.max(...sides) / Math.LN2;
}

/** Level of the next bins: on top of a resonance the wider surroundings make every bin look like a peak. */
function nextLevel(power: Float64Array, at: number, half: number): number {
  return median(power, at, [-1, 1], half, NEXT_BINS) / Math.LN2;
}

function median(power: Float64Array, at: number, sides: readonly number[], half: number, width: number) {
  const reach = Math.ceil(half);
  const around: number[] = [];
  for (const side of sides)
    for (let i = reach + 1; i <= reach + width; i++) {
      const bin = at + side * i;
      if (bin >= 1 && bin < power.length) around.push(power[bin]!);
    }
  // Five bins tell a median; fewer remain at the ends of the spectrum.
  return around.length >= 5 ? around.sort((a, b) => a - b)[around.length >> 1]! : 0;
}

function localPower(power: Float64Array, at: number, half: number): number {
  let sum = 0;
  const reach = Math.ceil(half);
  for (let k = at - reach; k <= at + reach; k++) if (k >= 1 && k < power.length) sum += power[k]!;
  return sum;
}

/** Σ w x exp(−iωt), by the recurrence of the rotation (its error grows as t units in the last place). */
function projection(x: Float64Array, window: Float64Array, frequency: number) {
  const omega = 2 * Math.PI * frequency;
  const [c, s] = [cos(omega), sin(omega)];
  let [re, im] = [1, 0];
  let [a, b] = [0, 0];
  for (let t = 0; t < x.length; t++) {
    const v = x[t]! * window[t]!;
    a += v * re;
    b -= v * im;
    [re, im] = [re * c - im * s, re * s + im * c];
  }
  return { real: a, imaginary: b };
}

/** Maximum of the windowed transform near `frequency` by golden section, and the sinusoid there. */
function refine(x: Float64Array, window: Float64Array, frequency: number, width: number): Sinusoid {
  const power = (f: number) => {
    const { real, imaginary } = projection(x, window, f);
    return real * real + imaginary * imaginary;
  };
  const GOLDEN = (Math.sqrt(5) - 1) / 2;
  let [low, high] = [Math.max(0, frequency - width), Math.min(0.5, frequency + width)];
  let [left, right] = [high - GOLDEN * (high - low), low + GOLDEN * (high - low)];
  let [atLeft, atRight] = [power(left), power(right)];
  // 20 steps narrow the bracket 15,000 times: a ten-thousandth of a bin.
  for (let i = 0; i < 20; i++) {
    if (atLeft >= atRight) {
      [high, right, atRight] = [right, left, atLeft];
      left = high - GOLDEN * (high - low);
      atLeft = power(left);
    } else {
      [low, left, atLeft] = [left, right, atRight];
      right = low + GOLDEN * (high - low);
      atRight = power(right);
    }
  }
  // The bracket's end itself is half a cycle per sample: an alternation sits exactly there.
  return fitAt(
    x,
    window,
    frequency + width >= 0.5 && power(0.5) >= power((low + high) / 2) ? 0.5 : (low + high) / 2,
  );
}

/** Weighted least squares of a sinusoid at one frequency. */
function fitAt(x: Float64Array, window: Float64Array, frequency: number): Sinusoid {
  const omega = 2 * Math.PI * frequency;
  const [c, s] = [cos(omega), sin(omega)];
  let [re, im] = [1, 0];
  let [cc, ss, cs, xc, xs] = [0, 0, 0, 0, 0];
  for (let t = 0; t < x.length; t++) {
    const w = window[t]!;
    cc += w * re * re;
    ss += w * im * im;
    cs += w * re * im;
    xc += w * x[t]! * re;
    xs += w * x[t]! * im;
    [re, im] = [re * c - im * s, re * s + im * c];
  }
  const determinant = cc * ss - cs * cs;
  // At 0 and ½ cycle per sample the sine vanishes: only the cosine is there.
  const single = determinant <= 1e-9 * cc * cc;
  const a = single ? xc / cc : (xc * ss - xs * cs) / determinant;
  const b = single ? 0 : (xs * cc - xc * cs) / determinant;
  const size = Math.sqrt(a * a + b * b);
  return {
    frequency,
    // Power is amplitude² / 2; an alternation of ±a has power a².
    amplitude: single ? size * Math.SQRT2 : size,
    phase: { cos: a, sin: b },
    skirt: 0,
  };
}

function subtract(x: Float64Array, line: Sinusoid, sign: 1 | -1): void {
  const omega = 2 * Math.PI * line.frequency;
  const [c, s] = [cos(omega), sin(omega)];
  let [re, im] = [1, 0];
  for (let t = 0; t < x.length; t++) {
    x[t] = x[t]! - sign * (line.phase.cos * re + line.phase.sin * im);
    [re, im] = [re * c - im * s, re * s + im * c];
  }
}
