import { exp as exponential, log10 } from '../base/elementary.ts';
import { CORRELATION_EDGES } from '../base/kernels.ts';
import type { LogSums } from './log-sums.ts';
import { FEWEST_PAIRS, firstEdge, type ScalingRegion } from './scaling.ts';
import type { DimensionCurve } from './types.ts';

/** Edges of the local slope's window: one octave. */
export const OCTAVE = 4;

/** Slope of ln C over the octave from an edge, null where too few pairs; centred half an octave above it. */
export function octaveSlope(sums: LogSums, variant: number, dimension: number, edge: number): number | null {
  if (edge < 0 || edge + OCTAVE >= CORRELATION_EDGES || sums.count(dimension, edge) < FEWEST_PAIRS)
    return null;
  return (sums.log(variant, dimension, edge + OCTAVE) - sums.log(variant, dimension, edge)) / Math.LN2;
}

/**
 * Takens' (1985, Lect. Notes Math. 1125, 99) maximum-likelihood dimension below a radius: C(r) / ∫ C/r dr, with
 * power laws between the edges and down to zero.
 */
export function takensEstimate(
  sums: LogSums,
  variant: number,
  dimension: number,
  from: number,
  to: number,
): number | null {
  const row = (variant * sums.dimensions + dimension - 1) * CORRELATION_EDGES;
  const slope = sums.slope(variant, dimension, from, to);
  if (!(slope > 0)) return null;
  // Relative to C at the upper radius, so that nothing under- or overflows.
  const relative = (b: number) => exponential(sums.logs[row + b]! - sums.logs[row + to]!);
  let integral = relative(from) / slope;
  for (let b = from; b < to; b++) {
    const [low, high] = [relative(b), relative(b + 1)];
    const width = sums.logRadii[b + 1]! - sums.logRadii[b]!;
    const rise = sums.logs[row + b + 1]! - sums.logs[row + b]!;
    // (C₂ − C₁) / s with s = rise / width; flat steps by the rectangle.
    integral += rise > 1e-9 ? ((high - low) * width) / rise : low * width;
  }
  return integral > 0 ? 1 / integral : null;
}

/** The curves behind a dimension, radii in the record's unit. */
export function dimensionCurve(
  sums: LogSums,
  std: number,
  region: ScalingRegion | null,
  measurableLimit: number,
): DimensionCurve {
  const edges = Array.from({ length: CORRELATION_EDGES }, (_, b) => b).filter(
    (b) =>
      sums.count(1, b) >= FEWEST_PAIRS &&
      (b === 0 || sums.count(1, b - 1) < sums.pairs) &&
      // A record of values near 1e308 has radii beyond what a double holds.
      Number.isFinite(sums.radii[b]! * std),
  );
  const dimensions = Array.from({ length: sums.dimensions }, (_, i) => i + 1);
  return {
    radius: edges.map((b) => sums.radii[b]! * std),
    sums: dimensions.map((dimension) => ({
      dimension,
      log10: edges.map((b) =>
        sums.count(dimension, b) >= FEWEST_PAIRS ? log10(sums.count(dimension, b) / sums.pairs) : null,
      ),
    })),
    slopes: dimensions.map((dimension) => ({
      dimension,
      value: edges.map((b) => octaveSlope(sums, 0, dimension, b - OCTAVE / 2)),
    })),
    region:
      region === null ? null : { low: sums.radii[region.from]! * std, high: sums.radii[region.to]! * std },
    byDimension: dimensions.map((dimension) => {
      if (region === null || region.from < firstEdge(sums, dimension))
        return { dimension, slope: null, takens: null };
      return {
        dimension,
        slope: sums.slope(0, dimension, region.from, region.to),
        takens: takensEstimate(sums, 0, dimension, region.from, region.to),
      };
    }),
    measurableLimit,
  };
}
