import { type Answer, finding } from '../base/answer.ts';
import { LEVEL, type LogSums, STUDENT_90 } from './log-sums.ts';
import { firstEdge, type ScalingRegion } from './scaling.ts';

/** Edges over which successive sums are compared at least: one octave. */
const FEWEST_STEPS = 4;
/**
 * The decay with the embedding must be followed over two e-folds, and its two halves must agree within this
 * share or their error, before it is called constant; else it is an upper bound, for it is approached from above.
 */
const FEWEST_FOLDS = 2;
const CONSTANCY = 0.15;

const METHOD =
  'decay of the correlation sum with the embedding dimension (Grassberger & Procaccia 1983, Phys. Rev. A 28, 2591)';

/**
 * Correlation entropy K₂ = lim ln(C_m / C_{m+1}) / (delay · interval), nats per time unit.
 * @param timePerDimension delay in time units
 */
export function correlationEntropy(
  sums: LogSums,
  region: ScalingRegion,
  timePerDimension: number,
  timeUnit: string,
): Answer {
  const steps: { readonly dimension: number; readonly from: number }[] = [];
  for (let m = region.firstDimension; m < sums.dimensions; m++) {
    const from = Math.max(region.from, firstEdge(sums, m + 1));
    if (region.to - from >= FEWEST_STEPS) steps.push({ dimension: m, from });
  }
  const rate = (variant: number, part: typeof steps) =>
    part.reduce(
      (sum, { dimension: m, from }) =>
        sum + sums.mean(variant, m, from, region.to) - sums.mean(variant, m + 1, from, region.to),
      0,
    ) /
    (part.length * timePerDimension);
  // At least three dimensions agree, so there are at least two steps.
  const half = steps.length >> 1;
  const [early, late] = [steps.slice(0, half), steps.slice(half)];
  const value = Math.max(0, rate(0, late));
  const error = STUDENT_90 * sums.standardError((v) => rate(v, late));
  const change = rate(0, early) - rate(0, late);
  const changeError = STUDENT_90 * sums.standardError((v) => rate(v, early) - rate(v, late));
  const followed = rate(0, steps) * timePerDimension * steps.length;
  const evidence = {
    region: [sums.radii[region.from]!, sums.radii[region.to]!],
    rates: steps.map((s) => rate(0, [s])),
    dimensions: steps.map((s) => s.dimension),
    standardError: error / STUDENT_90,
    folds: followed,
  };
  const spread = late.reduce((most, s) => Math.max(most, Math.abs(rate(0, [s]) - value)), 0);
  const unit = `1/${timeUnit}`;
  if (followed < FEWEST_FOLDS || Math.abs(change) > Math.max(CONSTANCY * value, changeError))
    return finding({
      value,
      low: value,
      high: value + error + spread,
      level: LEVEL,
      unit,
      method: METHOD,
      bound: 'upper',
      evidence,
    });
  const width = Math.sqrt(error * error + spread * spread);
  return finding({
    value,
    low: Math.max(0, value - width),
    high: value + width,
    level: LEVEL,
    unit,
    method: METHOD,
    evidence,
  });
}
