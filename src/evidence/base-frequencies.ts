import type { SpectralLine } from './spectral-lines.ts';

/** Lines this strong must be explained; weaker ones are drowned in the error of the others. */
const LEAST_SHARE = 1e-4;
/** Multiples and sums up to this order are tried: higher ones come as close to any frequency by chance. */
const HIGHEST_ORDER = 8;
/** A base must repeat this often in the record, or it would only be a fit. */
const FEWEST_PERIODS = 8;
/** Error of a frequency, in bins (1 / samples): a tenth of the width of a bin holds for lines 20 times above the background. */
const BIN_ERROR = 0.1;
const MOST_BASES = 4;

export interface BaseFrequencies {
  /** Cycles per sample; one: periodic, several: quasiperiodic. */
  readonly bases: readonly number[];
}

/**
 * The smallest set of base frequencies of which every strong line is a whole combination. First one base is
 * tried: the strongest line or its half, third, … (a period of several turns). Else lines are taken in
 * the order of their strength, each that earlier ones do not explain becoming a new base.
 */
export function baseFrequencies(lines: readonly SpectralLine[], samples: number): BaseFrequencies {
  const strong = lines.filter((line) => line.share >= LEAST_SHARE);
  if (strong.length === 0) return { bases: [] };
  const error = BIN_ERROR / samples;
  const single = singleBase(strong, samples, error);
  if (single !== null) return { bases: [single] };
  const bases: number[] = [];
  for (const line of strong) {
    if (bases.length >= MOST_BASES) break;
    if (bases.length > 0 && combines(bases, line.frequency, error)) continue;
    bases.push(line.frequency);
  }
  return { bases };
}

function singleBase(lines: readonly SpectralLine[], samples: number, error: number): number | null {
  for (let parts = 1; parts <= 2 * HIGHEST_ORDER; parts++) {
    let base = lines[0]!.frequency / parts;
    if (base * samples < FEWEST_PERIODS) return null;
    // Harmonics far up measure the base more finely than the strongest line does: refine it as they join.
    const fits = [...lines]
      .sort((a, b) => a.frequency - b.frequency)
      .every((line) => {
        // Harmonics above half a cycle per sample come back folded.
        for (const frequency of [line.frequency, 1 - line.frequency]) {
          const multiple = Math.round(frequency / base);
          const allowed = error * Math.max(1, multiple / parts);
          // Where the error reaches a tenth of the spacing of multiples, a match is chance.
          if (multiple < 1 || allowed > 0.1 * base) continue;
          if (Math.abs(frequency - multiple * base) <= allowed) {
            if (multiple > parts && frequency < 0.5) base = frequency / multiple;
            return true;
          }
        }
        return false;
      });
    if (fits) return lines[0]!.frequency / parts;
  }
  return null;
}

/** Is the frequency Σ kᵢ fᵢ, modulo 1, with Σ |kᵢ| ≤ HIGHEST_ORDER? */
function combines(bases: readonly number[], frequency: number, error: number): boolean {
  const search = (at: number, left: number, sum: number, order: number): boolean => {
    if (at === bases.length) {
      const turns = Math.abs(sum) - Math.floor(Math.abs(sum));
      const folded = turns > 0.5 ? 1 - turns : turns;
      return Math.abs(folded - frequency) <= error * Math.max(1, order);
    }
    for (let k = -left; k <= left; k++)
      if (search(at + 1, left - Math.abs(k), sum + k * bases[at]!, order + Math.abs(k))) return true;
    return false;
  };
  return search(0, HIGHEST_ORDER, 0, 0);
}
