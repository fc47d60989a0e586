import { defineTask } from '../base/compute.ts';
import type { DelayVectors, Kernels } from '../base/kernels.ts';

export interface DifferenceRegressionInput {
  readonly vectors: DelayVectors;
  /** Output of vector `i`: data[starts[i] + targetOffset]. */
  readonly targetOffset: number;
  /** Ordinals of the reference vectors in time order. */
  readonly references: Int32Array;
  readonly exclusion: number;
  readonly neighbours: number;
  readonly blocks: number;
}

/** Sums over the references of one block, by rank of the neighbour. */
export interface DifferenceSums {
  /** Σ squared distance of inputs, row-major blocks × neighbours. */
  readonly inputs: Float64Array;
  /** Σ half squared difference of outputs. */
  readonly outputs: Float64Array;
  readonly counts: Float64Array;
  /** Squared lengths of the gradients of local linear maps, in no order. */
  readonly gradients: Float64Array;
}

const SLICE = 100;
/** Neighbours of a local linear map per coefficient: four leave its gradient a noise share of a quarter. */
const PER_COEFFICIENT = 4;
const RIDGE = 1e-6;

/**
 * Squared differences of outputs against squared distances of inputs over the nearest neighbours (Stefánsson,
 * Končar & Jones 1997, Neural Comput. Appl. 5, 131), and the gradient of the map between them.
 */
export const differenceRegressionTask = defineTask(
  'geometry.differenceRegression',
  function* (kernels: Kernels, input: DifferenceRegressionInput): Generator<number, DifferenceSums, void> {
    const { vectors, targetOffset, references, exclusion, neighbours: k, blocks } = input;
    const { data, starts } = vectors;
    const m = vectors.offsets.length;
    const forFit = Math.min(256, Math.max(k, PER_COEFFICIENT * (m + 1)));
    const inputs = new Float64Array(blocks * k);
    const outputs = new Float64Array(blocks * k);
    const counts = new Float64Array(blocks * k);
    const gradients = new Float64Array(references.length);
    let fitted = 0;
    const index = kernels.neighbourIndex(vectors, 'euclidean');
    try {
      yield 0.05;
      for (let from = 0; from < references.length; from += SLICE) {
        const part = references.slice(from, from + SLICE);
        const found = index.nearest(part, forFit, exclusion);
        const queries = kernels.packDelayVectors({
          ...vectors,
          starts: part.map((i) => starts[i]!),
        });
        const { coefficients } = kernels.localFits({
          vectors,
          targetOffsets: Int32Array.of(targetOffset),
          queries,
          neighbours: found,
          order: 1,
          weights: 'uniform',
          ridge: RIDGE,
          coefficients: true,
        });
        for (let i = 0; i < part.length; i++) {
          const block = Math.floor(((from + i) * blocks) / references.length);
          const own = data[starts[part[i]!]! + targetOffset]!;
          if (found.indices[(i + 1) * forFit - 1]! < 0) continue;
          for (let rank = 0; rank < k; rank++) {
            const at = block * k + rank;
            const distance = found.distances[i * forFit + rank]!;
            const difference = data[starts[found.indices[i * forFit + rank]!]! + targetOffset]! - own;
            inputs[at]! += distance * distance;
            outputs[at]! += 0.5 * difference * difference;
            counts[at]!++;
          }
          let square = 0;
          for (let d = 0; d < m; d++) square += coefficients![i * m + d]! * coefficients![i * m + d]!;
          if (Number.isFinite(square)) gradients[fitted++] = square;
        }
        yield 0.05 + (0.95 * (from + part.length)) / references.length;
      }
    } finally {
      index.close();
    }
    return { inputs, outputs, counts, gradients: gradients.slice(0, fitted) };
  },
);

export interface DifferenceNoise {
  /** Variance of the output that the input does not explain: at least that of the noise on the output. */
  readonly unexplained: number;
  readonly unexplainedError: number;
  /** Median squared gradient: what noise on the inputs adds is at most about this times the noise's variance. */
  readonly gradient: number;
  readonly slope: number;
}

/** Intercept of the regression over the ranks, with its block jackknife error; undefined when too few pairs. */
export function regressDifferences(sums: DifferenceSums, blocks: number): DifferenceNoise | undefined {
  const k = sums.counts.length / blocks;
  const line = (left: number) => {
    const x = new Float64Array(k);
    const y = new Float64Array(k);
    for (let rank = 0; rank < k; rank++) {
      let [input, output, count] = [0, 0, 0];
      for (let b = 0; b < blocks; b++) {
        if (b === left) continue;
        input += sums.inputs[b * k + rank]!;
        output += sums.outputs[b * k + rank]!;
        count += sums.counts[b * k + rank]!;
      }
      x[rank] = input / count;
      y[rank] = output / count;
    }
    const mx = x.reduce((a, b) => a + b, 0) / k;
    const my = y.reduce((a, b) => a + b, 0) / k;
    let [xx, xy] = [0, 0];
    for (let i = 0; i < k; i++) {
      xx += (x[i]! - mx) * (x[i]! - mx);
      xy += (x[i]! - mx) * (y[i]! - my);
    }
    const slope = xx > 0 ? xy / xx : 0;
    return { intercept: my - slope * mx, slope };
  };
  if (sums.counts.some((c) => c === 0) || sums.gradients.length === 0) return undefined;
  const gradients = sums.gradients.slice().sort();
  const all = line(-1);
  const without = Array.from({ length: blocks }, (_, b) => line(b).intercept);
  const mean = without.reduce((a, b) => a + b, 0) / blocks;
  const squares = without.reduce((a, b) => a + (b - mean) * (b - mean), 0);
  return {
    unexplained: all.intercept,
    unexplainedError: Math.sqrt(((blocks - 1) / blocks) * squares),
    gradient: gradients[gradients.length >> 1]!,
    slope: all.slope,
  };
}
