import { powerOfTwo } from '../base/elementary.ts';
import { CORRELATION_EDGES, type CorrelationCounts, type CorrelationInput } from '../base/kernels.ts';

/** Classes of a difference: below the first edge, between two edges, beyond the last. */
export const CLASSES = CORRELATION_EDGES + 1;
const HIGH_WORD = new Uint8Array(Uint16Array.of(1).buffer)[0] === 1 ? 1 : 0;

export function correlationCounts(input: CorrelationInput): CorrelationCounts {
  const { series, valid, delay, dimensions, exclusion } = input;
  const starts = valid.length;
  const histogram = new Histogram(dimensions);
  const { cells } = histogram;
  const differences = new Float64Array(series.length);
  const words = new Int32Array(differences.buffer);
  const classes = new Uint8Array(series.length);
  const base = classBase(input);
  let pairs = 0;
  for (let lag = exclusion + 1; lag < starts; lag++) {
    const count = starts - lag;
    histogram.expect(count);
    // |x_t − x_(t+lag)| serves every dimension, and the class of a maximum is the maximum of classes.
    const span = count + (dimensions - 1) * delay;
    for (let t = 0; t < span; t++) differences[t] = series[t]! - series[t + lag]!;
    for (let t = 0; t < span; t++) classes[t] = classOf(words[2 * t + HIGH_WORD]!, base);
    for (let t = 0; t < count; t++) {
      if (!(valid[t]! & valid[t + lag]!)) continue;
      pairs++;
      let largest = 0;
      for (let d = 0, at = t, row = 0; d < dimensions; d++, at += delay, row += CLASSES) {
        largest = Math.max(largest, classes[at]!);
        cells[row + largest]!++;
      }
    }
  }
  return countsOf(input, histogram.total(), pairs);
}

export function correlationCountsFrom(input: CorrelationInput, references: Int32Array): CorrelationCounts {
  const { series, valid, delay, dimensions, exclusion } = input;
  const starts = valid.length;
  const histogram = new Histogram(dimensions);
  const { cells } = histogram;
  const difference = new Float64Array(1);
  const words = new Int32Array(difference.buffer);
  const base = classBase(input);
  let pairs = 0;
  for (const reference of references) {
    histogram.expect(starts);
    for (let t = 0; t < starts; t++) {
      if (!valid[t] || Math.abs(t - reference) <= exclusion) continue;
      pairs++;
      let largest = 0;
      for (let d = 0, shift = 0, row = 0; d < dimensions; d++, shift += delay, row += CLASSES) {
        difference[0] = series[t + shift]! - series[reference + shift]!;
        largest = Math.max(largest, classOf(words[HIGH_WORD]!, base));
        cells[row + largest]!++;
      }
    }
  }
  return countsOf(input, histogram.total(), pairs);
}

/**
 * Class of |difference|: the number of edges ≤ it. The edges are the doubles whose mantissa ends after its
 * top two bits, so exponent and those bits, read as an integer, count them: no logarithm and no search.
 */
function classOf(highWord: number, base: number): number {
  const position = ((highWord & 0x7fffffff) >> 18) - base;
  return position < 0 ? 0 : position > CORRELATION_EDGES ? CORRELATION_EDGES : position;
}

/** Position of the first edge among the quarter octaves of the doubles, less 1. */
export function classBase({ smallestExponent }: CorrelationInput): number {
  return (smallestExponent + 1023) * 4 - 1;
}

/** Histograms of classes, one row a dimension, counted in u32 (integer increments are cheaper) and kept in doubles. */
class Histogram {
  readonly cells: Uint32Array;
  readonly #total: Float64Array;
  #pending = 0;

  constructor(dimensions: number) {
    this.cells = new Uint32Array(dimensions * CLASSES);
    this.#total = new Float64Array(this.cells.length);
  }

  /** Makes room for so many more pairs before a cell can overflow. */
  expect(pairs: number): void {
    this.#pending += pairs;
    if (this.#pending < 2 ** 32) return;
    this.total();
    this.#pending = pairs;
  }

  total(): Float64Array {
    for (let i = 0; i < this.cells.length; i++) this.#total[i]! += this.cells[i]!;
    this.cells.fill(0);
    return this.#total;
  }
}

/** From classes to counts below each edge: a distance is < radii[b] when its class is ≤ b. */
export function countsOf(input: CorrelationInput, histogram: Float64Array, pairs: number): CorrelationCounts {
  const counts = new Float64Array(input.dimensions * CORRELATION_EDGES);
  for (let d = 0; d < input.dimensions; d++) {
    let sum = 0;
    for (let b = 0; b < CORRELATION_EDGES; b++) {
      sum += histogram[d * CLASSES + b]!;
      counts[d * CORRELATION_EDGES + b] = sum;
    }
  }
  return { radii: correlationRadii(input.smallestExponent), counts, pairs };
}

/** The radius edges, exact doubles. */
function correlationRadii(smallestExponent: number): Float64Array {
  return Float64Array.from(
    { length: CORRELATION_EDGES },
    (_, b) => powerOfTwo(smallestExponent + (b >> 2)) * (1 + (b & 3) / 4),
  );
}
