/**
 * The one interface between numerical policy and numerical work. `assembly/` (through `src/core/`) and
 * `src/fallback/` implement it with the same bits in every result: the same order of summation, the same
 * order of ties (distance, then smaller index), no fused multiply-add, and the elementary functions of
 * `elementary.ts`. Kernels do sums, searches and steps; thresholds and decisions live in the callers.
 *
 * Every method checks its arguments (lengths, index ranges, finite coordinates) and throws
 * `LeadspanError` `BAD_INPUT` naming the field. Inputs are never changed or detached; outputs are fresh
 * arrays owned by the caller. No method keeps a reference to its inputs except `neighbourIndex`, which
 * copies what it needs.
 */

/** Which build of the kernels runs. All three give the same bits. */
export type BackendName = 'wasm-simd' | 'wasm-scalar' | 'js';

/** Euclidean or maximum (Chebyshev) norm. */
export type Metric = 'euclidean' | 'maximum';

/**
 * `n` points of dimension `m` read from flat data without being copied out:
 * coordinate `d` of point `i` is `data[starts[i] + offsets[d]]`.
 *
 * Several channels are laid end to end in `data` (channel `c` begins at `c * length`), so one offset may
 * point into another channel. `starts` doubles as the time index (in samples) of the point, for the
 * Theiler exclusion. It must be strictly increasing. Only points whose coordinates are all present
 * (finite) may be listed: this is how gaps are never bridged.
 */
export interface DelayVectors {
  readonly data: Float64Array;
  readonly starts: Int32Array;
  readonly offsets: Int32Array;
}

/** Neighbours of `q` queries, row-major `q × k`, nearest first, ties by smaller index. */
export interface NearestNeighbours {
  readonly k: number;
  /** Ordinals into the indexed points; −1 where fewer than `k` admissible points exist. */
  readonly indices: Int32Array;
  /** Distances in the metric of the index (true distances, not squares); Infinity beside −1. */
  readonly distances: Float64Array;
}

/** All neighbours within a radius, compressed rows: those of query `i` are `[rowStarts[i], rowStarts[i + 1])`. */
export interface RadiusNeighbours {
  readonly rowStarts: Int32Array;
  /** Ordinals into the indexed points, ascending within a row. */
  readonly indices: Int32Array;
  readonly distances: Float64Array;
}

/** Query points given by coordinates (row-major `q × m`), optionally with times for the Theiler exclusion. */
export interface QueryPoints {
  readonly coordinates: Float64Array;
  /** Time index of each query, compared with `starts` of the indexed points. Omitted: nothing is excluded. */
  readonly times?: Int32Array;
}

/**
 * A k-d tree over delay vectors (Friedman, Bentley & Finkel 1977, ACM Trans. Math. Softw. 3, 209).
 * A neighbour `j` of a query at time `t` is admissible when `|starts[j] − t| > exclusion`
 * (Theiler 1986); `exclusion = −1` admits everything, the point itself included. Coordinates are added in
 * order; Euclidean distances are ranked by their squares, which tell apart what the root may not. A distance
 * that overflows is nowhere a neighbour; a radius taken from a returned distance finds that neighbour.
 */
export interface NeighbourIndex {
  readonly count: number;
  readonly dimension: number;
  readonly metric: Metric;
  /** The `k` nearest admissible neighbours of indexed points `queries` (ordinals). 1 ≤ k ≤ 256. */
  nearest(queries: Int32Array, k: number, exclusion: number): NearestNeighbours;
  /** The same for points given by coordinates. */
  nearestTo(queries: QueryPoints, k: number, exclusion: number): NearestNeighbours;
  /** All admissible neighbours of indexed points `queries` with distance ≤ radius. */
  within(queries: Int32Array, radius: number, exclusion: number): RadiusNeighbours;
  /** The same for points given by coordinates. */
  withinOf(queries: QueryPoints, radius: number, exclusion: number): RadiusNeighbours;
  /** Gives the memory back. Further calls throw `CLOSED`. Idempotent. */
  close(): void;
}

/**
 * Input of the correlation-sum kernels. Vector `t` of dimension `m` is
 * `(series[t], series[t + delay], …, series[t + (m − 1)·delay])`, maximum norm, for m = 1 … dimensions.
 * `valid[t]` is 1 where the vector of the *largest* dimension that starts at `t` is complete; its length
 * is `series.length − (dimensions − 1)·delay`. `series` may hold anything (0, say) at missing samples.
 */
export interface CorrelationInput {
  readonly series: Float64Array;
  readonly valid: Uint8Array;
  readonly delay: number;
  /** Largest embedding dimension, 1 … 32. */
  readonly dimensions: number;
  /** Theiler window in samples: pairs with |s − t| ≤ exclusion are left out. ≥ 0. */
  readonly exclusion: number;
  /** Radius grid: edge `b` is 2^(smallestExponent + ⌊b / 4⌋) · (1 + (b mod 4) / 4), b = 0 … 63. */
  readonly smallestExponent: number;
}

/** Number of radius edges of a correlation-sum histogram: 16 octaves, 4 edges to the octave. */
export const CORRELATION_EDGES = 64;

/** Counts of pairs closer than each radius, for every dimension. */
export interface CorrelationCounts {
  /** The 64 radius edges, ascending. */
  readonly radii: Float64Array;
  /** Row-major `dimensions × 64`: pairs with distance < radii[b] in dimension m = row + 1. Exact integers. */
  readonly counts: Float64Array;
  /** Admissible pairs in all (the same for every dimension). */
  readonly pairs: number;
}

export interface FalseNeighbourInput {
  readonly vectors: DelayVectors;
  /** Nearest neighbour of every vector (ordinal, −1: none), as `nearest` with k = 1 gives it. */
  readonly neighbours: Int32Array;
  /** Its distance. */
  readonly distances: Float64Array;
  /** Offset of the coordinate that dimension m + 1 adds. Both ends must lie inside `data`. */
  readonly nextOffset: number;
  /** A neighbour is false when |Δ next coordinate| > threshold · distance (Kennel et al. 1992). */
  readonly threshold: number;
  /** Neighbours farther than this are left out: their divergence cannot be judged (Hegger & Kantz 1999). */
  readonly judgeableDistance: number;
}

export interface FalseNeighbourCounts {
  /** Pairs judged: a neighbour exists, 0 < distance ≤ judgeableDistance, next coordinates finite. */
  readonly judged: number;
  readonly falseNeighbours: number;
  /** Cao (1997): Σ max(distance, |Δ next|) / distance over pairs with distance > 0 (judgeable or not). */
  readonly expansionSum: number;
  /** Cao (1997): Σ |Δ next| over the same pairs. */
  readonly stepSum: number;
  /** Number of pairs in the two sums. */
  readonly pairs: number;
}

export interface JointCountsInput {
  /** Bin number of each sample, 0 … bins − 1; 255 marks a missing sample. */
  readonly symbols: Uint8Array;
  /** 2 … 128. */
  readonly bins: number;
  /** Lags in samples, each ≥ 0. */
  readonly lags: Int32Array;
}

export interface DivergenceInput {
  readonly data: Float64Array;
  /** Start (index into `data`) of the first and second member of every pair. */
  readonly first: Int32Array;
  readonly second: Int32Array;
  /** How many steps each pair may be followed (both members stay inside their segments): 0 … steps. */
  readonly lengths: Int32Array;
  /** The difference followed is the Euclidean distance over these offsets; [0] follows the one sample. */
  readonly offsets: Int32Array;
  /** Steps followed: results have steps + 1 columns, lead 0 … steps. */
  readonly steps: number;
  /** Pairs are summed in blocks [blockStarts[b], blockStarts[b + 1]); last entry = number of pairs. */
  readonly blockStarts: Int32Array;
}

/** Row-major `blocks × (steps + 1)`. */
export interface DivergenceSums {
  /** Σ ln distance over pairs of the block that are still followed and apart by more than zero. */
  readonly logSums: Float64Array;
  /** How many pairs entered each sum. */
  readonly counts: Float64Array;
}

export interface NeighbourhoodDivergenceInput {
  readonly data: Float64Array;
  /** Start of each reference point. */
  readonly references: Int32Array;
  /** Compressed rows: the neighbours of reference `i` are `neighbours[rowStarts[i] … rowStarts[i + 1])`. */
  readonly rowStarts: Int32Array;
  /** Start (index into `data`) of each neighbour. */
  readonly neighbours: Int32Array;
  /** How many steps each reference–neighbour pair may be followed. */
  readonly lengths: Int32Array;
  readonly steps: number;
  /** References are summed in blocks, as in `DivergenceInput`. */
  readonly blockStarts: Int32Array;
}

export interface LocalFitInput {
  /** The library the neighbours come from. */
  readonly vectors: DelayVectors;
  /** Target column `h` of library vector `i` is data[starts[i] + targetOffsets[h]]; all must be finite for used neighbours. */
  readonly targetOffsets: Int32Array;
  /** Query coordinates, row-major `q × m`. */
  readonly queries: Float64Array;
  /** Neighbours of each query in the library, `q × k` (−1: none), and their distances. */
  readonly neighbours: NearestNeighbours;
  /** 0: weighted mean (locally constant). 1: weighted linear map (locally linear). */
  readonly order: 0 | 1;
  /** 'uniform', or 'tricube' of distance / (distance of the farthest neighbour · 1.0001) (Cleveland 1979). */
  readonly weights: 'uniform' | 'tricube';
  /** Ridge added to the normal equations, relative to their trace / m; 0 … 1. Centred on the query. */
  readonly ridge: number;
  /** Also return the fitted maps. */
  readonly coefficients?: boolean;
}

export interface LocalFits {
  /** Row-major `q × targets`; NaN where a query has no neighbour at all. */
  readonly predictions: Float64Array;
  /** Row-major `q × targets × m` (the local Jacobian rows), only when asked for; zeros where order = 0. */
  readonly coefficients?: Float64Array;
}

export interface SurrogateInput {
  /** The values of the record, any order; the surrogate is a permutation of them. Length 2^a·3^b·5^c ≥ 8. */
  readonly values: Float64Array;
  /**
   * The starting rank of each sample, a permutation of 0 … n − 1: a random one (Fisher–Yates from the
   * caller's seed), or `ranks` of an earlier call, which goes on from there with the same bits.
   */
  readonly permutation: Int32Array;
  /** Iterations at most; stops earlier when the rank order no longer changes. */
  readonly iterations: number;
}

export interface Surrogate {
  readonly values: Float64Array;
  /** Rank of each sample among the sorted values: the whole state of the iteration. */
  readonly ranks: Int32Array;
  readonly iterations: number;
  readonly converged: boolean;
}

/** Half spectrum of a real series: bins 0 … ⌊n/2⌋. */
export interface HalfSpectrum {
  readonly real: Float64Array;
  readonly imaginary: Float64Array;
}

/** Vector fields built into the kernels; `src/model/` holds the same fields with source and parameters. */
export type FieldName =
  | 'lorenz'
  | 'rossler'
  | 'hyperchaotic-rossler'
  | 'chua'
  | 'ueda'
  | 'quadratic-jerk'
  | 'lorenz-96';

export interface FlowInput {
  readonly field: FieldName;
  /** In the order documented at the field in `src/model/`. */
  readonly parameters: Float64Array;
  /** State, length n (`ueda` carries its phase as a third state). */
  readonly state: Float64Array;
  /** `tangentCount` tangent vectors as columns of a row-major `n × tangentCount` matrix. */
  readonly tangents: Float64Array;
  readonly tangentCount: number;
  /** Fixed step of the classical fourth-order Runge–Kutta scheme (Kutta 1901). */
  readonly step: number;
  /** Steps between orthonormalisations. */
  readonly stepsPerBlock: number;
  /** Number of orthonormalisations in this call. */
  readonly blocks: number;
}

export interface FlowResult {
  readonly state: Float64Array;
  readonly tangents: Float64Array;
  /** Row-major `blocks × tangentCount`: ln of the diagonal of R of each block. */
  readonly logNorms: Float64Array;
  /** Per block: ∫ divergence of the field dt along the orbit (trapezoid over the steps). */
  readonly divergences: Float64Array;
}

export interface Orthonormalised {
  /** Row-major `rows × columns`, columns orthonormal. */
  readonly matrix: Float64Array;
  /** ln of the norm of each column before it was normalised (the diagonal of R, made positive). */
  readonly logNorms: Float64Array;
}

export interface Kernels {
  readonly backend: BackendName;
  /** Delay vectors as a row-major `n × m` matrix. */
  packDelayVectors(vectors: DelayVectors): Float64Array;
  /** k-d tree over the vectors; the caller closes it. */
  neighbourIndex(vectors: DelayVectors, metric: Metric): NeighbourIndex;
  /** All pairs s < t, by diagonals: cost N²/2 (Grassberger & Procaccia 1983). */
  correlationCounts(input: CorrelationInput): CorrelationCounts;
  /** Pairs (r, t) of reference points `references` (start indices, each valid) with all valid t: cost R·N. */
  correlationCountsFrom(input: CorrelationInput, references: Int32Array): CorrelationCounts;
  falseNeighbourCounts(input: FalseNeighbourInput): FalseNeighbourCounts;
  /** Joint histogram of (symbol[t], symbol[t + lag]): row-major `lags × bins × bins`, exact integers. */
  jointCounts(input: JointCountsInput): Float64Array;
  /** Rosenstein, Collins & De Luca 1993: mean log distance of nearest-neighbour pairs. */
  divergenceSums(input: DivergenceInput): DivergenceSums;
  /** Kantz 1994: Σ over references of ln(mean |difference| over the neighbourhood still followed). */
  neighbourhoodDivergence(input: NeighbourhoodDivergenceInput): DivergenceSums;
  localFits(input: LocalFitInput): LocalFits;
  /** Modified Gram–Schmidt, column by column, left to right. A zero column gives logNorm −Infinity and zeros. */
  orthonormalise(matrix: Float64Array, rows: number, columns: number): Orthonormalised;
  /** Runge–Kutta steps of a built-in field with its tangent vectors and Gram–Schmidt between blocks. */
  advanceFlow(input: FlowInput): FlowResult;
  /** Discrete Fourier transform of a real series, Σ x_t exp(−2πi kt/n). n = 2^a·3^b·5^c ≥ 2. */
  realSpectrum(series: Float64Array): HalfSpectrum;
  /** Its inverse (includes the 1/n). */
  realSeries(spectrum: HalfSpectrum, length: number): Float64Array;
  /** Iterative amplitude-adjusted surrogate (Schreiber & Schmitz 1996, Phys. Rev. Lett. 77, 635). */
  surrogate(input: SurrogateInput): Surrogate;
  /** Bytes of linear memory in use now and at most so far (0 for the fallback). */
  memory(): { readonly used: number; readonly peak: number };
  /** Gives everything back; further calls throw `CLOSED`. Idempotent. */
  close(): void;
}
