import { log } from '../base/elementary.ts';
import type { LocalFitInput, LocalFits, Orthonormalised } from '../base/kernels.ts';

/** The bandwidth of tricube weights reaches just past the farthest neighbour, so that it keeps some weight. */
export const TRICUBE_REACH = 1.0001;
/** A pivot this small beside its diagonal is rounding: that coefficient is set to zero. */
export const PIVOT_FLOOR = 1e-13;

export function localFits(input: LocalFitInput): LocalFits {
  const { vectors, targetOffsets, queries, neighbours, order, weights, ridge } = input;
  const { data, starts, offsets } = vectors;
  const { k, indices, distances } = neighbours;
  const m = offsets.length;
  const targets = targetOffsets.length;
  const count = indices.length / k;
  const predictions = new Float64Array(count * targets);
  const coefficients = input.coefficients ? new Float64Array(count * targets * m) : undefined;

  const weight = new Float64Array(k);
  const centred = new Float64Array(k * m);
  const meanPoint = new Float64Array(m);
  const values = new Float64Array(k * targets);
  const meanValue = new Float64Array(targets);
  const moments = new Float64Array(m * m);
  const diagonal = new Float64Array(m);
  const cross = new Float64Array(m * targets);

  for (let q = 0; q < count; q++) {
    const row = q * k;
    let n = 0;
    while (n < k && indices[row + n]! >= 0) n++;
    if (n === 0) {
      predictions.fill(Number.NaN, q * targets, (q + 1) * targets);
      continue;
    }
    const total = fillWeights(weight, distances, row, n, weights === 'tricube');

    meanValue.fill(0);
    for (let i = 0; i < n; i++) {
      const start = starts[indices[row + i]!]!;
      const w = weight[i]!;
      for (let h = 0; h < targets; h++) {
        const y = data[start + targetOffsets[h]!]!;
        values[i * targets + h] = y;
        meanValue[h] = meanValue[h]! + w * y;
      }
    }
    for (let h = 0; h < targets; h++) meanValue[h] = meanValue[h]! / total;
    if (order === 0 || n < m + 2) {
      predictions.set(meanValue, q * targets);
      continue;
    }

    meanPoint.fill(0);
    for (let i = 0; i < n; i++) {
      const start = starts[indices[row + i]!]!;
      const w = weight[i]!;
      for (let d = 0; d < m; d++) {
        const x = data[start + offsets[d]!]! - queries[q * m + d]!;
        centred[i * m + d] = x;
        meanPoint[d] = meanPoint[d]! + w * x;
      }
    }
    for (let d = 0; d < m; d++) meanPoint[d] = meanPoint[d]! / total;

    moments.fill(0);
    cross.fill(0);
    for (let i = 0; i < n; i++) {
      const w = weight[i]!;
      for (let d = 0; d < m; d++) centred[i * m + d] = centred[i * m + d]! - meanPoint[d]!;
      for (let d = 0; d < m; d++) {
        const x = w * centred[i * m + d]!;
        for (let e = 0; e <= d; e++) moments[d * m + e] = moments[d * m + e]! + x * centred[i * m + e]!;
        for (let h = 0; h < targets; h++)
          cross[d * targets + h] = cross[d * targets + h]! + x * (values[i * targets + h]! - meanValue[h]!);
      }
    }
    let trace = 0;
    for (let d = 0; d < m; d++) trace += moments[d * m + d]!;
    const extra = (ridge * trace) / m;
    for (let d = 0; d < m; d++) {
      moments[d * m + d] = moments[d * m + d]! + extra;
      diagonal[d] = moments[d * m + d]!;
    }
    factorise(moments, diagonal, m);
    solve(moments, cross, m, targets);

    for (let h = 0; h < targets; h++) {
      let value = meanValue[h]!;
      for (let d = 0; d < m; d++) value -= cross[d * targets + h]! * meanPoint[d]!;
      predictions[q * targets + h] = value;
      if (coefficients)
        for (let d = 0; d < m; d++) coefficients[(q * targets + h) * m + d] = cross[d * targets + h]!;
    }
  }
  return coefficients ? { predictions, coefficients } : { predictions };
}

/** Weights of one row and their sum. All alike when every neighbour coincides with the query. */
function fillWeights(
  weight: Float64Array,
  distances: Float64Array,
  row: number,
  n: number,
  tricube: boolean,
): number {
  const farthest = distances[row + n - 1]!;
  let total = 0;
  for (let i = 0; i < n; i++) {
    let w = 1;
    if (tricube && farthest > 0) {
      const u = distances[row + i]! / (farthest * TRICUBE_REACH);
      const v = 1 - u * u * u;
      w = v * v * v;
    }
    weight[i] = w;
    total += w;
  }
  return total;
}

/** Cholesky factor in the lower triangle, row by row. A pivot lost to rounding becomes zero. */
function factorise(a: Float64Array, diagonal: Float64Array, m: number): void {
  for (let j = 0; j < m; j++) {
    for (let e = 0; e < j; e++) {
      let sum = a[j * m + e]!;
      for (let c = 0; c < e; c++) sum -= a[j * m + c]! * a[e * m + c]!;
      const pivot = a[e * m + e]!;
      a[j * m + e] = pivot > 0 ? sum / pivot : 0;
    }
    let sum = a[j * m + j]!;
    for (let c = 0; c < j; c++) sum -= a[j * m + c]! * a[j * m + c]!;
    a[j * m + j] = sum > PIVOT_FLOOR * diagonal[j]! ? Math.sqrt(sum) : 0;
  }
}

/** Solves L Lᵀ X = B in place for all right-hand sides (columns of the row-major m × columns matrix B). */
function solve(l: Float64Array, b: Float64Array, m: number, columns: number): void {
  for (let j = 0; j < m; j++) {
    for (let c = 0; c < j; c++) subtractRow(b, j, c, l[j * m + c]!, columns);
    divideRow(b, j, l[j * m + j]!, columns);
  }
  for (let j = m - 1; j >= 0; j--) {
    for (let c = j + 1; c < m; c++) subtractRow(b, j, c, l[c * m + j]!, columns);
    divideRow(b, j, l[j * m + j]!, columns);
  }
}

function subtractRow(b: Float64Array, to: number, from: number, factor: number, columns: number): void {
  for (let h = 0; h < columns; h++)
    b[to * columns + h] = b[to * columns + h]! - factor * b[from * columns + h]!;
}

function divideRow(b: Float64Array, row: number, pivot: number, columns: number): void {
  for (let h = 0; h < columns; h++) b[row * columns + h] = pivot > 0 ? b[row * columns + h]! / pivot : 0;
}

export function orthonormalise(matrix: Float64Array, rows: number, columns: number): Orthonormalised {
  const result = matrix.slice();
  const norms = new Float64Array(columns);
  gramSchmidt(result, rows, columns, norms, 0);
  return { matrix: result, logNorms: norms.map((norm) => (norm > 0 ? log(norm) : Number.NEGATIVE_INFINITY)) };
}

/**
 * Modified Gram–Schmidt in place, right-looking: each finished column is taken out of all later ones.
 * Sums run over the rows in order. `norms[at + j]` gets the norm of column j.
 */
export function gramSchmidt(
  a: Float64Array,
  rows: number,
  columns: number,
  norms: Float64Array,
  at: number,
): void {
  const dots = new Float64Array(columns);
  for (let j = 0; j < columns; j++) {
    let square = 0;
    for (let r = 0; r < rows; r++) square += a[r * columns + j]! * a[r * columns + j]!;
    const norm = Math.sqrt(square);
    norms[at + j] = norm;
    const inverse = norm > 0 ? 1 / norm : 0;
    for (let l = j + 1; l < columns; l++) dots[l] = 0;
    for (let r = 0; r < rows; r++) {
      const x = a[r * columns + j]! * inverse;
      a[r * columns + j] = x;
      for (let l = j + 1; l < columns; l++) dots[l] = dots[l]! + x * a[r * columns + l]!;
    }
    for (let r = 0; r < rows; r++) {
      const x = a[r * columns + j]!;
      for (let l = j + 1; l < columns; l++) a[r * columns + l] = a[r * columns + l]! - dots[l]! * x;
    }
  }
}
