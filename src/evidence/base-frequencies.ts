import type { SpectralLine } from './spectral-lines.ts';

/** Lines this strong must be explained; weaker ones are drowned in the error of the others. */
const LEAST_SHARE = 1e-4;
/** Multiples and sums up to this order are tried: higher ones come as close to any frequency by chance. */
const HIGHEST_ORDER = 8;
/** A base must repeat this often in the record, or it would only be a fit. */
const FEWEST_PERIODS = 8;
const MOST_BASES = 4;
/** Periods longer than 32 samples reach half a cycle per sample with their 16th harmonic. */
const SLOW_BASE = 1 / 32;
/** Error of a frequency in bins (1 / samples) that other lines cause, however clean the record. */
const LEAST_ERROR = 0.05;

export interface BaseFrequencies {
  /** Cycles per sample; one: periodic, several: quasiperiodic. */
  readonly bases: readonly number[];
}

interface Measured {
  readonly frequency: number;
  readonly error: number;
}

/**
 * The smallest set of base frequencies of which every strong line is a whole combination. First one base is
 * tried: the strongest line or its half, third, … (a period of several turns). Else lines are taken in
 * the order of their strength, each that earlier ones do not explain becoming a new base.
 * @param rest share of the variance outside the lines
 */
export function baseFrequencies(
  lines: readonly SpectralLine[],
  samples: number,
  rest: number,
): BaseFrequencies {
  const strong = lines
    .filter((line) => line.share >= LEAST_SHARE)
    .map((line) => ({ frequency: line.frequency, error: errorOf(line, samples, rest) }));
  if (strong.length === 0) return { bases: [] };
  const single = singleBase(strong, samples);
  if (single !== null) return { bases: [single] };
  const bases: Measured[] = [];
  for (const line of strong) {
    if (bases.length >= MOST_BASES) break;
    if (bases.length === 0 || !combines(bases, line)) bases.push(line);
  }
  return { bases: bases.map((base) => base.frequency) };
}

/**
 * Three standard errors. The bound for a sinusoid in white noise (Rife & Boorstyn 1974, IEEE Trans. Inf. Theory
 * 20, 591) is 0.39 bins over the root of the peak's height above the noise, samples · share / (2 rest); the
 * window costs a factor of 1.6.
 */
function errorOf(line: SpectralLine, samples: number, rest: number): number {
  const height = (samples * line.share) / (2 * Math.max(rest, 1e-12));
  return Math.max(LEAST_ERROR, (3 * 1.6 * 0.39) / Math.sqrt(height)) / samples;
}

function singleBase(lines: readonly Measured[], samples: number): number | null {
  const first = lines[0]!;
  const ascending = [...lines].sort((a, b) => a.frequency - b.frequency);
  for (let parts = 1; parts <= 2 * HIGHEST_ORDER; parts++) {
    let base = first.frequency / parts;
    let baseError = first.error / parts;
    if (base * samples < FEWEST_PERIODS) return null;
    const fits = ascending.every((line) => {
      // Harmonics above half a cycle per sample come back folded; of slow bases those are too weak to see.
      for (const frequency of base < SLOW_BASE ? [line.frequency] : [line.frequency, 1 - line.frequency]) {
        const multiple = Math.round(frequency / base);
        const allowed = line.error + multiple * baseError;
        // Where the error reaches a tenth of the spacing of multiples, a match is chance.
        if (multiple < 1 || allowed > 0.1 * base) continue;
        if (Math.abs(frequency - multiple * base) > allowed) continue;
        // A harmonic measures the base more finely than the line below it did.
        if (line.error / multiple < baseError) {
          base = frequency / multiple;
          baseError = line.error / multiple;
        }
        return true;
      }
      return false;
    });
    if (fits) return first.frequency / parts;
  }
  return null;
}

/** Is the frequency Σ kᵢ fᵢ, modulo 1, with Σ |kᵢ| ≤ HIGHEST_ORDER? */
function combines(bases: readonly Measured[], line: Measured): boolean {
  const search = (at: number, left: number, sum: number, error: number): boolean => {
    if (at === bases.length) {
      const turns = Math.abs(sum) - Math.floor(Math.abs(sum));
      const folded = turns > 0.5 ? 1 - turns : turns;
      return Math.abs(folded - line.frequency) <= error;
    }
    const base = bases[at]!;
    for (let k = -left; k <= left; k++)
      if (search(at + 1, left - Math.abs(k), sum + k * base.frequency, error + Math.abs(k) * base.error))
        return true;
    return false;
  };
  return search(0, HIGHEST_ORDER, 0, line.error);
}
