import { backwardSolve, cholesky, type FoldSums, foldSums, forwardSolve } from './folds.ts';
import { Paths, valueRange } from './path.ts';
import type { ForecastSetting, PredictorSpec } from './predictors.ts';

export type PolynomialSpec = Extract<PredictorSpec, { kind: 'polynomial' }>;

/** Monomials at most: cost grows with the square, and 100 rows each should stand behind them. */
export const MOST_MONOMIALS = 84; // degree 3 in 6 coordinates
const MOST_ROWS = 8_000;
/** Origins whose paths are carried at once. */
const BATCH = 128;

/** Number of monomials of `variables` up to `degree`, the constant included: C(variables + degree, degree). */
export function monomialCount(variables: number, degree: number): number {
  let n = 1;
  for (let i = 1; i <= degree; i++) n = (n * (variables + i)) / i;
  return n;
}

/**
 * Ridge-regularised polynomial autoregression on the delay coordinates, iterated (nonlinear vector
 * autoregression: Gauthier et al. 2021, Nat. Commun. 12, 5564). It fits the change over 1 … step samples.
 * Monomials are ordered by degree, so one set of sums serves all degrees and ridges.
 * @returns per spec, row-major origins × leads, scaled units
 */
export function* predictPolynomial(
  setting: ForecastSetting,
  specs: readonly PolynomialSpec[],
  origins: Int32Array,
  leads: Int32Array,
): Generator<number, Float64Array[], void> {
  const outputs = specs.map(() => new Float64Array(origins.length * leads.length));
  if (specs.length === 0 || origins.length === 0) return outputs;
  const { data, count, channels, offsets, library } = setting;
  const degree = Math.max(...specs.map((s) => s.degree));
  const most = Math.max(...specs.map((s) => s.step));
  const monomials = new Monomials(offsets.length, degree);
  const features = monomials.count;
  const stride = Math.max(1, Math.ceil(library.length / MOST_ROWS));
  const rows = stride > 1 ? library.filter((_, i) => i % stride === 0) : library;
  const coordinates = new Float64Array(offsets.length);
  const sums = yield* foldSums(
    setting,
    features + channels * most,
    rows,
    (t, w) => {
      for (let d = 0; d < offsets.length; d++) coordinates[d] = data[t + offsets[d]!]!;
      monomials.write(coordinates, 0, w);
      for (let c = 0; c < channels; c++) {
        const now = data[c * count + t]!;
        for (let s = 0; s < most; s++) w[features + c * most + s] = data[c * count + t + s + 1]! - now;
      }
    },
    0, // exclusion already keeps library vectors and their futures away from each origin
    features,
  );
  const range = valueRange(setting);
  const last = leads[leads.length - 1]!;
  for (let fold = 0; fold < sums.folds; fold++) {
    const members: number[] = [];
    for (let i = 0; i < origins.length; i++) if (sums.foldOf(origins[i]!) === fold) members.push(i);
    if (members.length === 0) continue;
    const fits = new FoldFits(sums, fold, features, channels, most);
    for (let n = 0; n < specs.length; n++) {
      const spec = specs[n]!;
      const map = fits.map(spec, monomialCount(offsets.length, spec.degree));
      yield 0.5 + (0.5 * (fold + n / specs.length)) / sums.folds;
      for (let from = 0; from < members.length; from += BATCH) {
        const batch = members.slice(from, from + BATCH);
        const times = Int32Array.from(batch, (i) => origins[i]!);
        const paths = new Paths(setting, range, times, last + spec.step);
        for (let lead = 0; lead < last; lead += spec.step) {
          advance(paths, monomials, map, setting, spec.step, lead, batch.length);
          if ((lead / spec.step) % 8 === 7)
            yield 0.5 + (0.5 * (fold + (n + lead / last) / specs.length)) / sums.folds;
        }
        const values = paths.targets(leads);
        for (let b = 0; b < batch.length; b++)
          outputs[n]!.set(
            values.subarray(b * leads.length, (b + 1) * leads.length),
            batch[b]! * leads.length,
          );
      }
      yield 0.5 + (0.5 * (fold + (n + 1) / specs.length)) / sums.folds;
    }
  }
  return outputs;
}

interface PolynomialMap {
  readonly features: number;
  /** Row-major (channels × step) × features. */
  readonly coefficients: Float64Array;
}

function advance(
  paths: Paths,
  monomials: Monomials,
  map: PolynomialMap,
  setting: ForecastSetting,
  step: number,
  lead: number,
  origins: number,
): void {
  const m = setting.offsets.length;
  const states = paths.coordinates(lead);
  const w = new Float64Array(monomials.count);
  for (let i = 0; i < origins; i++) {
    monomials.write(states, i * m, w);
    for (let c = 0; c < setting.channels; c++) {
      const now = paths.get(i, c, lead);
      for (let s = 0; s < step; s++) {
        const row = (c * step + s) * map.features;
        let change = 0;
        for (let f = 0; f < map.features; f++) change += map.coefficients[row + f]! * w[f]!;
        paths.set(i, c, lead + s + 1, now + change);
      }
    }
  }
}

/** Ridge solutions of one fold, on monomials scaled to unit mean square, so that one ridge suits all degrees. */
class FoldFits {
  readonly #products: Float64Array;
  readonly #rows: number;
  readonly #factors = new Map<string, { readonly factor: Float64Array; readonly rank: number }>();
  readonly #features: number;
  readonly #channels: number;
  readonly #most: number;

  constructor(sums: FoldSums, fold: number, features: number, channels: number, most: number) {
    const { products, rows } = sums.sums(fold);
    this.#products = products;
    this.#rows = rows;
    this.#features = features;
    this.#channels = channels;
    this.#most = most;
  }

  /** The fit with the first `used` monomials; no change (persistence) where it is not determined. */
  map(spec: PolynomialSpec, used: number): PolynomialMap {
    const width = this.#features + this.#channels * this.#most;
    const coefficients = new Float64Array(this.#channels * spec.step * used);
    const map = { features: used, coefficients };
    if (this.#rows < 2 * used) return map;
    const scale = new Float64Array(used);
    for (let f = 0; f < used; f++) scale[f] = Math.sqrt(this.#products[f * width + f]!) || 1;
    const { factor, rank } = this.#factor(spec.ridge, used, width, scale);
    if (rank < used) return map;
    const cross = new Float64Array(used);
    for (let c = 0; c < this.#channels; c++) {
      for (let s = 0; s < spec.step; s++) {
        const row = (this.#features + c * this.#most + s) * width;
        for (let f = 0; f < used; f++) cross[f] = this.#products[row + f]! / scale[f]!;
        const x = backwardSolve(factor, used, used, forwardSolve(factor, used, used, cross));
        for (let f = 0; f < used; f++) coefficients[(c * spec.step + s) * used + f] = x[f]! / scale[f]!;
      }
    }
    return map;
  }

  /** Specs that differ in their step share the factorisation. */
  #factor(ridge: number, used: number, width: number, scale: Float64Array) {
    const key = `${used}/${ridge}`;
    const known = this.#factors.get(key);
    if (known) return known;
    const normal = new Float64Array(used * used);
    for (let i = 0; i < used; i++) {
      for (let j = 0; j <= i; j++)
        normal[i * used + j] = this.#products[i * width + j]! / (scale[i]! * scale[j]!);
      normal[i * used + i]! += ridge;
    }
    const result = cholesky(normal, used, used, 0);
    this.#factors.set(key, result);
    return result;
  }
}

/** Monomials up to a degree, by degree, each the product of an earlier one with one coordinate. */
class Monomials {
  readonly count: number;
  readonly #parent: Int32Array;
  readonly #variable: Int32Array;

  constructor(variables: number, degree: number) {
    const parent = [0];
    const variable = [0];
    let level = [0];
    for (let d = 1; d <= degree; d++) {
      const next: number[] = [];
      for (const p of level) {
        // Coordinates never fall along a product, so that each monomial is made once.
        for (let v = p === 0 ? 0 : variable[p]!; v < variables; v++) {
          next.push(parent.length);
          parent.push(p);
          variable.push(v);
        }
      }
      level = next;
    }
    this.count = parent.length;
    this.#parent = Int32Array.from(parent);
    this.#variable = Int32Array.from(variable);
  }

  /** Writes the monomials of the state at `states[at …]` into the front of `out`. */
  write(states: Float64Array, at: number, out: Float64Array): void {
    out[0] = 1;
    for (let q = 1; q < this.count; q++) out[q] = out[this.#parent[q]!]! * states[at + this.#variable[q]!]!;
  }
}
