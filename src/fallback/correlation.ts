import { CORRELATION_EDGES, type CorrelationCounts, type CorrelationInput } from '../base/kernels.ts';

/** Classes of a difference: below the first edge, between edges, beyond the last. */
const CLASSES = CORRELATION_EDGES + 1;

/**
 * Class of a difference: the number of edges that are ≤ it. The edges are the doubles whose bits below the
 * top two of the mantissa are zero, so the class is read off the high word: no logarithm, no search.
 */
function classify(series: Float64Array, input: CorrelationInput) {
  const float = new Float64Array(1);
  const words = new Int32Array(float.buffer);
  const high = new Uint8Array(Uint16Array.of(1).buffer)[0] === 1 ? 1 : 0;
  const base = (input.smallestExponent + 1023) * 4;
  return (a: number, b: number): number => {
    float[0] = series[a]! - series[b]!;
    const position = ((words[high]! & 0x7fffffff) >> 18) - base + 1;
    return position < 0 ? 0 : position > CORRELATION_EDGES ? CORRELATION_EDGES : position;
  };
}

export function correlationCounts(input: CorrelationInput): CorrelationCounts {
  const { series, valid, delay, dimensions, exclusion } = input;
  const starts = valid.length;
  const classOf = classify(series, input);
  const histogram = new Float64Array(dimensions * CLASSES);
  const classes = new Uint8Array(series.length);
  let pairs = 0;
  for (let lag = exclusion + 1; lag < starts; lag++) {
    const span = starts - lag + (dimensions - 1) * delay;
    for (let t = 0; t < span; t++) classes[t] = classOf(t, t + lag);
    for (let t = 0; t + lag < starts; t++) {
      if (!(valid[t]! & valid[t + lag]!)) continue;
      pairs++;
      let largest = 0;
      for (let d = 0, at = t, row = 0; d < dimensions; d++, at += delay, row += CLASSES) {
        const c = classes[at]!;
        if (c > largest) largest = c;
        histogram[row + largest]!++;
      }
    }
  }
  return accumulate(input, histogram, pairs);
}

export function correlationCountsFrom(input: CorrelationInput, references: Int32Array): CorrelationCounts {
  const { valid, delay, dimensions, exclusion, series } = input;
  const starts = valid.length;
  const classOf = classify(series, input);
  const histogram = new Float64Array(dimensions * CLASSES);
  const largest = new Uint8Array(starts);
  let pairs = 0;
  for (const reference of references) {
    largest.fill(0);
    for (let t = 0; t < starts; t++) if (valid[t] && Math.abs(t - reference) > exclusion) pairs++;
    for (let d = 0; d < dimensions; d++) {
      const shift = d * delay;
      const row = d * CLASSES;
      for (let t = 0; t < starts; t++) {
        const c = classOf(reference + shift, t + shift);
        if (c > largest[t]!) largest[t] = c;
        if (valid[t] && Math.abs(t - reference) > exclusion) histogram[row + largest[t]!]!++;
      }
    }
  }
  return accumulate(input, histogram, pairs);
}

/** From classes to counts below each edge. */
function accumulate(input: CorrelationInput, histogram: Float64Array, pairs: number): CorrelationCounts {
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
export function correlationRadii(smallestExponent: number): Float64Array {
  return Float64Array.from(
    { length: CORRELATION_EDGES },
    (_, b) => powerOfTwo(smallestExponent + (b >> 2)) * (1 + (b & 3) / 4),
  );
}

function powerOfTwo(exponent: number): number {
  let value = 1;
  for (let i = 0; i < Math.abs(exponent); i++) value = exponent > 0 ? value * 2 : value / 2;
  return value;
}
