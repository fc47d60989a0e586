import { defineTask } from '../base/compute.ts';
import { log } from '../base/elementary.ts';
import type { DelayVectors, Kernels, NearestNeighbours } from '../base/kernels.ts';

/** Input of {@link localExponentTask}. Plain data, one gapless channel in standard deviations. */
export interface LocalExponentInput {
  readonly series: Float64Array;
  /** Samples between coordinates, and samples of one step of the fitted map. */
  readonly delay: number;
  readonly dimension: number;
  /** Theiler window in samples. */
  readonly window: number;
  /** Steps of each of 20 blocks at most; default 100. */
  readonly steps?: number;
}

export interface LocalExponent {
  /** Mean ln stretching per sample of each block of the orbit. */
  readonly blocks: readonly number[];
  /** Root mean square out-of-sample error of the fits, one step ahead, in standard deviations. */
  readonly error: number;
  /** Share of fits whose slope the neighbourhood supports at all. */
  readonly supported: number;
  readonly neighbours: number;
}

const BLOCKS = 20;
/** Steps before a block counts: the tangent vector turns into the growing direction meanwhile. */
const TURN_STEPS = 10;
/** Fits in all: enough that the spread over the attractor (about 1 per step) averages to a few hundredths. */
const MOST_STEPS = 100;
const CHUNK = 60;
const TUNING_POINTS = 300;
const MOST_NEIGHBOURS = 192;
const RIDGE = 1e-6;
/** A step that wipes a difference out counts as this factor: nothing is known below it. */
const WIPED = 1e-4;

/**
 * Largest exponent from the products of locally fitted slopes (Eckmann, Kamphorst, Ruelle & Ciliberto 1986,
 * Phys. Rev. A 34, 4971; for noisy systems Nychka, Ellner, Gallant & McCaffrey 1992, J. R. Stat. Soc. B
 * 54, 399). It judges the rule behind the record: random forcing does not make it positive.
 */
export const localExponentTask = defineTask(
  'evidence.local-exponent',
  function* (
    kernels: Kernels,
    input: LocalExponentInput,
  ): Generator<number, LocalExponent | undefined, void> {
    const { series, delay, dimension } = input;
    const span = (dimension - 1) * delay;
    const count = series.length - span - delay;
    const steps = Math.min(input.steps ?? MOST_STEPS, Math.floor(count / (delay * BLOCKS)) - TURN_STEPS);
    const fewer = steps < 5;
    const blocks = fewer ? Math.floor(count / (delay * (TURN_STEPS + 5))) : BLOCKS;
    const length = fewer ? 5 : steps;
    if (blocks < 5) return undefined;
    const vectors: DelayVectors = {
      data: series,
      starts: Int32Array.from({ length: count }, (_, i) => i + span),
      offsets: Int32Array.from({ length: dimension }, (_, d) => -d * delay),
    };
    const exclusion = Math.max(input.window, span) + delay;
    const index = kernels.neighbourIndex(vectors, 'euclidean');
    try {
      yield 0;
      const k = yield* chooseNeighbours(kernels, index, vectors, exclusion, delay);
      const fits = new Fits(kernels, vectors, delay, k);
      const rates: number[] = [];
      let squares = 0;
      let supported = 0;
      let total = 0;
      const stride = Math.floor((count - delay * (length + TURN_STEPS)) / Math.max(1, blocks - 1));
      for (let b = 0; b < blocks; b++) {
        const chain = Int32Array.from({ length: length + TURN_STEPS }, (_, s) => b * stride + s * delay);
        let tangent = new Float64Array(dimension);
        tangent[0] = 1;
        let sum = 0;
        for (let from = 0; from < chain.length; from += CHUNK) {
          const part = chain.slice(from, from + CHUNK);
          const { slopes, errors, support } = fits.at(part, index.nearest(part, k, exclusion));
          for (let i = 0; i < part.length; i++) {
            const next = new Float64Array(dimension);
            for (let d = 0; d < dimension; d++) next[0] = next[0]! + slopes[i * dimension + d]! * tangent[d]!;
            for (let d = 1; d < dimension; d++) next[d] = tangent[d - 1]!;
            let norm = 0;
            for (let d = 0; d < dimension; d++) norm += next[d]! * next[d]!;
            norm = Math.sqrt(norm);
            if (from + i >= TURN_STEPS) sum += log(Math.max(norm, WIPED));
            if (norm < WIPED) {
              next.fill(0);
              next[0] = 1;
              norm = 1;
            }
            for (let d = 0; d < dimension; d++) next[d] = next[d]! / norm;
            tangent = next;
            squares += errors[i]! * errors[i]!;
            supported += support[i]!;
            total++;
          }
          yield (b + from / chain.length) / blocks;
        }
        rates.push(sum / (length * delay));
      }
      return {
        blocks: rates,
        error: Math.sqrt(squares / total),
        supported: supported / total,
        neighbours: k,
      };
    } finally {
      index.close();
    }
  },
);

/** Locally linear fits with their residuals. */
class Fits {
  readonly #kernels: Kernels;
  readonly #vectors: DelayVectors;
  readonly #lead: number;
  readonly #k: number;

  constructor(kernels: Kernels, vectors: DelayVectors, lead: number, k: number) {
    this.#kernels = kernels;
    this.#vectors = vectors;
    this.#lead = lead;
    this.#k = k;
  }

  at(points: Int32Array, neighbours: NearestNeighbours) {
    const { data, starts, offsets } = this.#vectors;
    const m = offsets.length;
    const k = this.#k;
    const queries = this.#kernels.packDelayVectors({
      ...this.#vectors,
      starts: points.map((p) => starts[p]!),
    });
    const { predictions, coefficients } = this.#kernels.localFits({
      vectors: this.#vectors,
      targetOffsets: Int32Array.of(this.#lead),
      queries,
      neighbours,
      order: 1,
      weights: 'uniform',
      ridge: RIDGE,
      coefficients: true,
    });
    const slopes = coefficients!;
    const errors = new Float64Array(points.length);
    const support = new Float64Array(points.length);
    for (let q = 0; q < points.length; q++) {
      const truth = data[starts[points[q]!]! + this.#lead]!;
      errors[q] = Number.isNaN(predictions[q]!) ? truth : predictions[q]! - truth;
      // Residuals and explained variation about the neighbours' mean.
      let n = 0;
      let mean = 0;
      while (n < k && neighbours.indices[q * k + n]! >= 0) {
        mean += data[starts[neighbours.indices[q * k + n]!]! + this.#lead]!;
        n++;
      }
      mean /= n;
      let residual = 0;
      let around = 0;
      for (let j = 0; j < n; j++) {
        const start = starts[neighbours.indices[q * k + j]!]!;
        let fitted = predictions[q]!;
        for (let d = 0; d < m; d++)
          fitted += slopes[q * m + d]! * (data[start + offsets[d]!]! - queries[q * m + d]!);
        const y = data[start + this.#lead]!;
        residual += (y - fitted) * (y - fitted);
        around += (y - mean) * (y - mean);
      }
      // Slopes shrink by what chance alone explains (positive-part rule of James & Stein 1961).
      const explained = Math.max(0, around - residual) / m;
      const left = residual / Math.max(1, n - m - 1);
      const factor = explained > left ? 1 - left / explained : 0;
      for (let d = 0; d < m; d++) slopes[q * m + d] = slopes[q * m + d]! * factor;
      support[q] = factor;
    }
    return { slopes, errors, support };
  }
}

/** Neighbours with the smallest out-of-sample error: few follow curvature, many average noise. */
function* chooseNeighbours(
  kernels: Kernels,
  index: ReturnType<Kernels['neighbourIndex']>,
  vectors: DelayVectors,
  exclusion: number,
  lead: number,
) {
  const n = vectors.starts.length;
  const m = vectors.offsets.length;
  const points = Int32Array.from({ length: Math.min(TUNING_POINTS, n) }, (_, i) =>
    Math.floor(((i + 0.5) * n) / Math.min(TUNING_POINTS, n)),
  );
  const most = Math.min(MOST_NEIGHBOURS, n >> 3);
  const tried: number[] = [];
  for (let k = 3 * (m + 1); k <= most; k *= 2) tried.push(k);
  if (tried.length === 0) tried.push(Math.max(m + 2, most));
  const largest = tried[tried.length - 1]!;
  const sums = tried.map(() => 0);
  for (let from = 0; from < points.length; from += CHUNK) {
    const part = points.slice(from, from + CHUNK);
    const found = index.nearest(part, largest, exclusion);
    for (let t = 0; t < tried.length; t++) {
      const k = tried[t]!;
      const { errors } = new Fits(kernels, vectors, lead, k).at(part, first(found, part.length, k));
      for (const e of errors) sums[t] = sums[t]! + e * e;
    }
    yield 0;
  }
  let best = 0;
  for (let t = 1; t < tried.length; t++) if (sums[t]! < sums[best]!) best = t;
  return tried[best]!;
}

function first(found: NearestNeighbours, queries: number, k: number): NearestNeighbours {
  const indices = new Int32Array(queries * k);
  const distances = new Float64Array(queries * k);
  for (let q = 0; q < queries; q++) {
    indices.set(found.indices.subarray(q * found.k, q * found.k + k), q * k);
    distances.set(found.distances.subarray(q * found.k, q * found.k + k), q * k);
  }
  return { k, indices, distances };
}
