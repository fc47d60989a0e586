import { createRandom } from '../base/random.ts';

/**
 * First lead (1 … steps) at which each origin's |error| exceeds the tolerance; steps + 1 where it never does.
 * @param errors row-major origins × steps, leads 1 … steps
 */
export function firstExits(errors: Float64Array, steps: number, tolerance: number): Int32Array {
  const exits = new Int32Array(errors.length / steps);
  for (let i = 0; i < exits.length; i++) {
    let lead = 1;
    while (lead <= steps && Math.abs(errors[i * steps + lead - 1]!) <= tolerance) lead++;
    exits[i] = lead;
  }
  return exits;
}

/**
 * Conformal rank: the j-th smallest of n exit times such that a new origin's is at least as large with
 * probability ≥ confidence. For n exchangeable origins j = ⌊(n + 1)(1 − p)⌋ (Vovk, Gammerman & Shafer 2005;
 * for dependent data, blockwise: Chernozhukov, Wüthrich & Zhu 2018, Proc. Mach. Learn. Res. 75, 732).
 * Overlapping origins are worth fewer: the share ⌊(m + 1)(1 − p)⌋ / (m + 1) is taken at m `independent` ones.
 * 0: too few independent origins to promise anything at this confidence.
 */
export function conformalRank(n: number, independent: number, confidence: number): number {
  const m = Math.max(1, Math.floor(Math.min(n, independent)));
  // 1e-9 absorbs the rounding of 1 − p: 10 · (1 − 0.9) is 0.9999999999999998.
  const allowed = Math.floor((m + 1) * (1 - confidence) + 1e-9);
  return Math.floor(((n + 1) * allowed) / (m + 1) + 1e-9);
}

/** The rank-th smallest (1-based). */
export function orderStatistic(values: Int32Array, rank: number): number {
  return Int32Array.from(values).sort()[rank - 1]!;
}

export interface BootstrapSpread {
  /** Quantiles of the rank-th smallest over resamples. */
  readonly low: number;
  readonly high: number;
  /** Variance over resamples of the share of origins with exit time below `mark`. */
  readonly shareVariance: number;
}

/** Resamples: percentiles at 5 and 95 % are then known to about ±1 %. */
const RESAMPLES = 400;

/**
 * Sampling spread of an order statistic by the moving-block bootstrap (Künsch 1989, Ann. Stat. 17, 1217):
 * stretches of neighbouring origins are drawn together, so that their dependence is kept.
 * @param exits in order of time
 * @param block origins per block
 */
export function bootstrapRank(
  exits: Int32Array,
  rank: number,
  block: number,
  level: number,
  seed: number,
  mark: number,
): BootstrapSpread {
  const n = exits.length;
  const b = Math.max(1, Math.min(block, n));
  const random = createRandom(seed, 71, rank);
  let longest = 0;
  for (const exit of exits) longest = Math.max(longest, exit);
  const counts = new Int32Array(longest + 1);
  const ranks = new Int32Array(RESAMPLES);
  const shares = new Float64Array(RESAMPLES);
  for (let r = 0; r < RESAMPLES; r++) {
    counts.fill(0);
    let below = 0;
    for (let drawn = 0; drawn < n; ) {
      const start = random.integer(n - b + 1);
      for (let k = 0; k < b && drawn < n; k++, drawn++) {
        const exit = exits[start + k]!;
        counts[exit]!++;
        if (exit < mark) below++;
      }
    }
    let value = 0;
    for (let seen = counts[0]!; seen < rank; ) seen += counts[++value]!;
    ranks[r] = value;
    shares[r] = below / n;
  }
  ranks.sort();
  const tail = (1 - level) / 2;
  let mean = 0;
  for (const share of shares) mean += share;
  mean /= RESAMPLES;
  let variance = 0;
  for (const share of shares) variance += (share - mean) * (share - mean);
  return {
    low: ranks[Math.floor(tail * (RESAMPLES - 1))]!,
    high: ranks[Math.ceil((1 - tail) * (RESAMPLES - 1))]!,
    shareVariance: variance / (RESAMPLES - 1),
  };
}
