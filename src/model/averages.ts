import { type Answer, finding, refusal } from '../base/answer.ts';

/** Fewest batches that still give a standard error with a usable t quantile. */
const FEWEST_BATCHES = 16;
const MOST_BATCHES = 256;
/**
 * Lag-one correlation of batch means below which they count as independent. Exponents of flows show a
 * negative one in short batches: growth within a turn that the next takes back.
 */
const INDEPENDENT = 0.2;

export interface BlockStatistics {
  /** Time averages, one per column. */
  readonly means: readonly number[];
  /** Standard errors of the means. */
  readonly errors: readonly number[];
  readonly batches: number;
  /** Time per batch. */
  readonly batchTime: number;
}

/**
 * Means and standard errors by batch means (Flegal & Jones 2010, Ann. Stat. 38, 1034): the run is cut into
 * batches, made longer until the means of neighbouring batches are uncorrelated in every column.
 * @param rows row-major blocks × columns, each an integral over `blockTime`
 */
export function blockStatistics(rows: Float64Array, columns: number, blockTime: number): BlockStatistics {
  const blocks = rows.length / columns;
  const means = Array.from({ length: columns }, (_, c) => {
    let sum = 0;
    for (let b = 0; b < blocks; b++) sum += rows[b * columns + c]!;
    return sum / (blocks * blockTime);
  });
  let batches = Math.min(MOST_BATCHES, blocks);
  for (;;) {
    const size = Math.floor(blocks / batches);
    const batchMeans = batchAverages(rows, columns, batches, size, blockTime);
    const errors = batchMeans.map((column) => standardError(column));
    const correlated = batchMeans.some((column) => Math.abs(lagOne(column)) > INDEPENDENT);
    if (!correlated || batches / 2 < FEWEST_BATCHES)
      return { means, errors, batches, batchTime: size * blockTime };
    batches = Math.floor(batches / 2);
  }
}

function batchAverages(
  rows: Float64Array,
  columns: number,
  batches: number,
  size: number,
  blockTime: number,
): number[][] {
  return Array.from({ length: columns }, (_, c) =>
    Array.from({ length: batches }, (_, k) => {
      let sum = 0;
      for (let b = k * size; b < (k + 1) * size; b++) sum += rows[b * columns + c]!;
      return sum / (size * blockTime);
    }),
  );
}

function standardError(values: readonly number[]): number {
  const n = values.length;
  if (n < 2) return 0;
  const mean = values.reduce((a, b) => a + b, 0) / n;
  const square = values.reduce((a, b) => a + (b - mean) * (b - mean), 0);
  return Math.sqrt(square / (n - 1) / n);
}

function lagOne(values: readonly number[]): number {
  const mean = values.reduce((a, b) => a + b, 0) / values.length;
  let cross = 0;
  let square = 0;
  values.forEach((v, i) => {
    square += (v - mean) * (v - mean);
    if (i > 0) cross += (v - mean) * (values[i - 1]! - mean);
  });
  return square > 0 ? cross / square : 0;
}

/** 95 % quantile of Student's t, for two-sided 90 % intervals: expansion about the normal (Abramowitz & Stegun 1964, 26.7.5). */
export function studentQuantile(freedom: number): number {
  const z = 1.6448536269514722;
  if (freedom < 1) return z;
  const z3 = z * z * z;
  const z5 = z3 * z * z;
  return z + (z3 + z) / (4 * freedom) + (5 * z5 + 16 * z3 + 3 * z) / (96 * freedom * freedom);
}

/**
 * Kaplan–Yorke dimension of descending exponents (Kaplan & Yorke 1979): j + (λ₁ + … + λ_j) / |λ_{j+1}|, j the
 * last with a sum that is not negative. Undefined (null) when the sum of all given is still positive but
 * more exponents exist.
 */
export function kaplanYorkeDimension(exponents: readonly number[], variables: number): number | null {
  let sum = 0;
  for (let j = 0; j < exponents.length; j++) {
    const next = exponents[j]!;
    if (sum + next < 0) return next === 0 ? j : j + sum / -next;
    sum += next;
  }
  return exponents.length === variables ? variables : null;
}

/** Kaplan–Yorke dimension with an interval by the jackknife over batches (Efron 1982). */
export function kaplanYorkeAnswer(
  rows: Float64Array,
  columns: number,
  variables: number,
  blockTime: number,
  level: number,
): Answer {
  const { means, batches } = blockStatistics(rows, columns, blockTime);
  const sorted = (values: readonly number[]) => [...values].sort((a, b) => b - a);
  const value = kaplanYorkeDimension(sorted(means), variables);
  if (value === null)
    return refusal(
      'NOT_APPLICABLE',
      `The sum of the ${columns} exponents computed is not negative, so the dimension lies beyond them.`,
      'Ask for more exponents.',
      { exponents: columns },
    );
  const size = Math.floor(rows.length / columns / batches);
  const averages = batchAverages(rows, columns, batches, size, blockTime);
  const totals = averages.map((column) => column.reduce((a, b) => a + b, 0));
  const without: number[] = [];
  for (let k = 0; k < batches && batches > 1; k++) {
    const d = kaplanYorkeDimension(
      sorted(totals.map((total, c) => (total - averages[c]![k]!) / (batches - 1))),
      variables,
    );
    if (d !== null) without.push(d);
  }
  const mean = without.reduce((a, b) => a + b, 0) / Math.max(1, without.length);
  const square = without.reduce((a, b) => a + (b - mean) * (b - mean), 0);
  const error = without.length > 1 ? Math.sqrt((square * (without.length - 1)) / without.length) : 0;
  const half = studentQuantile(batches - 1) * error;
  return finding({
    value,
    low: Math.max(0, value - half),
    high: Math.min(variables, value + half) < value ? value : Math.min(variables, value + half),
    level,
    unit: '1',
    method:
      'Kaplan–Yorke dimension of the spectrum (Kaplan & Yorke 1979), interval by jackknife over batches',
  });
}
