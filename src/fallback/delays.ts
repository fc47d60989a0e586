import type {
  DelayVectors,
  FalseNeighbourCounts,
  FalseNeighbourInput,
  JointCountsInput,
} from '../base/kernels.ts';

export function packDelayVectors({ data, starts, offsets }: DelayVectors): Float64Array {
  const m = offsets.length;
  const packed = new Float64Array(starts.length * m);
  for (let i = 0, at = 0; i < starts.length; i++) {
    const start = starts[i]!;
    for (let d = 0; d < m; d++) packed[at++] = data[start + offsets[d]!]!;
  }
  return packed;
}

export function falseNeighbourCounts(input: FalseNeighbourInput): FalseNeighbourCounts {
  const { data, starts } = input.vectors;
  const { neighbours, distances, nextOffset, threshold, judgeableDistance } = input;
  let judged = 0;
  let falseNeighbours = 0;
  let expansionSum = 0;
  let stepSum = 0;
  let pairs = 0;
  for (let i = 0; i < neighbours.length; i++) {
    const j = neighbours[i]!;
    const distance = distances[i]!;
    if (j < 0 || !(distance > 0)) continue;
    const next = Math.abs(data[starts[i]! + nextOffset]! - data[starts[j]! + nextOffset]!);
    if (!(next < Number.POSITIVE_INFINITY)) continue; // a missing sample (NaN)
    expansionSum += Math.max(next, distance) / distance;
    stepSum += next;
    pairs++;
    if (distance > judgeableDistance) continue;
    judged++;
    if (next > threshold * distance) falseNeighbours++;
  }
  return { judged, falseNeighbours, expansionSum, stepSum, pairs };
}

export function jointCounts({ symbols, bins, lags }: JointCountsInput): Float64Array {
  const cells = bins * bins;
  const counts = new Float64Array(lags.length * cells);
  for (let l = 0; l < lags.length; l++) {
    const lag = lags[l]!;
    const base = l * cells;
    for (let t = 0; t + lag < symbols.length; t++) {
      const a = symbols[t]!;
      const b = symbols[t + lag]!;
      if (a < bins && b < bins) counts[base + a * bins + b]!++;
    }
  }
  return counts;
}
