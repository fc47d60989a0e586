import type { ForecastSetting } from './predictors.ts';

/**
 * Sums of squares and products for least squares, gathered once for all folds. Time is cut where any
 * fold's excluded stretch begins or ends; a fold's sums are those of the pieces outside its stretch.
 */
export interface FoldSums {
  /** Fold of an origin. */
  foldOf(origin: number): number;
  readonly folds: number;
  /** Σ w wᵀ over the fold's rows, row-major width × width, lower triangle; and the number of rows. */
  sums(fold: number): { readonly products: Float64Array; readonly rows: number };
}

/** Rows per slice. */
const SLICE = 256;

/**
 * @param width length of a row w (regressors and targets together)
 * @param rows times of the rows, ascending
 * @param fill writes row `t` into the buffer
 * @param reach samples before and after `t` that a row uses: rows sharing a sample with an origin's window
 *   are left out of its fold
 * @param regressors leading entries of w; the products of the others with each other stay 0
 */
export function* foldSums(
  setting: ForecastSetting,
  width: number,
  rows: Int32Array,
  fill: (t: number, w: Float64Array) => void,
  reach: number,
  regressors = width,
): Generator<number, FoldSums, void> {
  const { foldEdges, exclusion } = setting;
  const folds = Math.max(1, foldEdges.length - 1);
  const margin = exclusion + reach;
  const stretches = Array.from({ length: folds }, (_, f) =>
    foldEdges.length === 0
      ? { from: 0, to: 0 }
      : { from: foldEdges[f]! - margin, to: foldEdges[f + 1]! + margin },
  );
  const cuts = [...new Set(stretches.flatMap((s) => [s.from, s.to]))].sort((a, b) => a - b);
  const pieces = cuts.length + 1;
  const products = Array.from({ length: pieces }, () => new Float64Array(width * width));
  const counts = new Array<number>(pieces).fill(0);
  const w = new Float64Array(width);
  let piece = 0;
  for (let r = 0; r < rows.length; r++) {
    const t = rows[r]!;
    while (piece < cuts.length && t >= cuts[piece]!) piece++;
    fill(t, w);
    const sum = products[piece]!;
    for (let i = 0; i < width; i++) {
      const wi = w[i]!;
      const at = i * width;
      // Products of targets with each other are not needed.
      const to = i < regressors ? i : regressors - 1;
      for (let j = 0; j <= to; j++) sum[at + j]! += wi * w[j]!;
    }
    counts[piece]!++;
    if (r % SLICE === SLICE - 1) yield (0.5 * r) / rows.length;
  }
  return {
    folds,
    foldOf: (origin) => {
      let f = 0;
      while (f < folds - 1 && origin >= foldEdges[f + 1]!) f++;
      return f;
    },
    sums: (fold) => {
      const { from, to } = stretches[fold]!;
      const total = new Float64Array(width * width);
      let n = 0;
      for (let p = 0; p < pieces; p++) {
        // Piece p covers [cuts[p − 1], cuts[p]).
        const begin = p === 0 ? Number.NEGATIVE_INFINITY : cuts[p - 1]!;
        if (begin >= from && begin < to) continue;
        for (let i = 0; i < total.length; i++) total[i]! += products[p]![i]!;
        n += counts[p]!;
      }
      return { products: total, rows: n };
    },
  };
}

/**
 * Cholesky factor (lower triangle) of the leading n × n block of a symmetric matrix given by its lower
 * triangle of row length `width`. Stops where a pivot falls below `tolerance` of its diagonal: columns from
 * there on depend on the earlier ones. Returns the order reached.
 */
export function cholesky(
  matrix: Float64Array,
  width: number,
  n: number,
  tolerance: number,
): { readonly factor: Float64Array; readonly rank: number } {
  const factor = new Float64Array(n * n);
  for (let i = 0; i < n; i++) {
    for (let j = 0; j <= i; j++) {
      let sum = matrix[i * width + j]!;
      for (let k = 0; k < j; k++) sum -= factor[i * n + k]! * factor[j * n + k]!;
      if (j < i) factor[i * n + j] = sum / factor[j * n + j]!;
      else if (sum > tolerance * matrix[i * width + i]! && sum > 0) factor[i * n + i] = Math.sqrt(sum);
      else return { factor, rank: i };
    }
  }
  return { factor, rank: n };
}

/** Solves L z = b for the first `n` rows of a factor of row length `width`. */
export function forwardSolve(factor: Float64Array, width: number, n: number, b: Float64Array): Float64Array {
  const z = new Float64Array(n);
  for (let i = 0; i < n; i++) {
    let sum = b[i]!;
    for (let k = 0; k < i; k++) sum -= factor[i * width + k]! * z[k]!;
    z[i] = sum / factor[i * width + i]!;
  }
  return z;
}

/** Solves Lᵀ x = z. */
export function backwardSolve(factor: Float64Array, width: number, n: number, z: Float64Array): Float64Array {
  const x = new Float64Array(n);
  for (let i = n - 1; i >= 0; i--) {
    let sum = z[i]!;
    for (let k = i + 1; k < n; k++) sum -= factor[k * width + i]! * x[k]!;
    x[i] = sum / factor[i * width + i]!;
  }
  return x;
}
