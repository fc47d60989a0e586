import { log } from '../base/elementary.ts';
import { backwardSolve, cholesky, type FoldSums, foldSums, forwardSolve } from './folds.ts';
import { valueRange } from './path.ts';
import type { ForecastSetting } from './predictors.ts';

/** Highest order tried: past this BIC rarely finds more in records of the lengths met, at square cost. */
const HIGHEST_ORDER = 32;
/** Rows of the fit at most, evenly thinned: coefficients are then known to better than 1 %. */
const MOST_ROWS = 20_000;

/**
 * Linear autoregression of the target on its own past, the reference every nonlinear forecast must beat:
 * least squares, order by the Bayesian information criterion (Schwarz 1978, Ann. Stat. 6, 461), iterated
 * sample by sample. Fitted to the samples outside each origin's block and exclusion.
 */
export function* predictLinear(
  setting: ForecastSetting,
  origins: Int32Array,
  leads: Int32Array,
): Generator<number, Float64Array, void> {
  const { data, count, target, present } = setting;
  const base = target * count;
  const order = Math.max(1, Math.min(HIGHEST_ORDER, Math.floor(setting.library.length / 50)));
  const rows = completeRows(present, order);
  // Row: lags 1 … order, then the value itself.
  const sums = yield* foldSums(
    setting,
    order + 1,
    rows,
    (t, w) => {
      for (let k = 0; k < order; k++) w[k] = data[base + t - 1 - k]!;
      w[order] = data[base + t]!;
    },
    order,
  );
  const models: ReturnType<typeof autoregression>[] = [];
  for (let f = 0; f < sums.folds; f++) {
    models.push(autoregression(sums, f, order));
    yield 0.5;
  }
  const range = valueRange(setting);
  const [low, high] = [range.low[target]!, range.high[target]!];
  const last = leads[leads.length - 1]!;
  const path = new Float64Array(order + last);
  const out = new Float64Array(origins.length * leads.length);
  for (let i = 0; i < origins.length; i++) {
    const origin = origins[i]!;
    let past = 0;
    while (past < order && origin - past >= 0 && present[origin - past] === 1) past++;
    for (let k = 0; k < order; k++) path[order - 1 - k] = k < past ? data[base + origin - k]! : 0;
    // Near a gap the past may be shorter than the order: the best model of that order is used.
    const coefficients = models[sums.foldOf(origin)]!(past);
    for (let h = 0; h < last; h++) {
      let next = 0;
      for (let k = 0; k < coefficients.length; k++) next += coefficients[k]! * path[order + h - 1 - k]!;
      path[order + h] = Math.min(high, Math.max(low, next));
    }
    for (let l = 0; l < leads.length; l++) out[i * leads.length + l] = path[order + leads[l]! - 1]!;
    if (i % 32 === 31) yield 0.5 + (0.5 * i) / origins.length;
  }
  return out;
}

/** Coefficients by the longest order allowed. Cholesky factors of nested orders are nested too. */
function autoregression(sums: FoldSums, fold: number, order: number): (longest: number) => Float64Array {
  const { products, rows } = sums.sums(fold);
  const width = order + 1;
  const cross = products.slice(order * width, order * width + order);
  const total = products[order * width + order]!;
  // Lags of a smooth record are nearly dependent: what 12 digits cannot tell apart adds no information.
  const { factor, rank } = cholesky(products, width, order, 1e-12);
  const z = forwardSolve(factor, order, rank, cross);
  // Residual sum of squares of order p is total − Σ_{i<p} z_i²: all orders from one factorisation.
  const scores = [0];
  let residual = total;
  for (let p = 1; p <= rank; p++) {
    residual = residual - z[p - 1]! * z[p - 1]!;
    // Rounding leaves a relative 1e-13 at best; below it orders cannot be compared.
    const share = Math.max(residual / total, 1e-13);
    scores.push(rows * log(share) + p * log(rows));
  }
  const cache = new Map<number, Float64Array>();
  return (longest) => {
    const limit = Math.min(longest, rank);
    const known = cache.get(limit);
    if (known) return known;
    let best = 0;
    for (let p = 1; p <= limit; p++) if (scores[p]! < scores[best]!) best = p;
    const coefficients = backwardSolve(factor, order, best, z.subarray(0, best));
    cache.set(limit, coefficients);
    return coefficients;
  };
}

/** Times t such that t − order … t are all present, at most MOST_ROWS of them, evenly thinned. */
function completeRows(present: Uint8Array, order: number): Int32Array {
  const rows: number[] = [];
  let run = 0;
  for (let t = 0; t < present.length; t++) {
    run = present[t] === 0 ? 0 : run + 1;
    if (run > order) rows.push(t);
  }
  const stride = Math.ceil(rows.length / MOST_ROWS);
  return Int32Array.from(stride > 1 ? rows.filter((_, i) => i % stride === 0) : rows);
}
