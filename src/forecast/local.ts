import type { Kernels, NearestNeighbours, NeighbourIndex } from '../base/kernels.ts';
import { Paths, type ValueRange, valueRange } from './path.ts';
import type { ForecastSetting, PredictorSpec } from './predictors.ts';

export type LocalSpec = Extract<PredictorSpec, { kind: 'local' }>;

/** Origins per slice: a few milliseconds of plain JavaScript. */
const SLICE = 32;

/**
 * Local predictors in state space: weighted mean of the futures of the nearest states, or a linear map
 * fitted to them (Farmer & Sidorowich 1987, Phys. Rev. Lett. 59, 845; Sugihara & May 1990, Nature 344,
 * 734; Casdagli 1989, Physica D 35, 335). Several structures share one search tree.
 * @returns per spec, row-major origins × leads, scaled units
 */
export function* predictLocal(
  kernels: Kernels,
  setting: ForecastSetting,
  specs: readonly LocalSpec[],
  origins: Int32Array,
  leads: Int32Array,
): Generator<number, Float64Array[], void> {
  const outputs = specs.map(() => new Float64Array(origins.length * leads.length));
  if (specs.length === 0 || origins.length === 0) return outputs;
  const vectors = { data: setting.data, starts: setting.library, offsets: setting.offsets };
  const range = valueRange(setting);
  const index = kernels.neighbourIndex(vectors, 'euclidean');
  try {
    const rounds = Math.ceil(origins.length / SLICE);
    for (let round = 0; round < rounds; round++) {
      const batch = origins.subarray(round * SLICE, (round + 1) * SLICE);
      const at = round * SLICE * leads.length;
      // Direct structures differ only in what they do with the neighbours: one search serves them all.
      const queries = coordinatesOf(setting, batch);
      const most = Math.max(0, ...specs.filter((s) => s.step === 0).map((s) => s.neighbours));
      const nearest = most > 0 ? search(index, setting, batch, queries, most) : undefined;
      for (let s = 0; s < specs.length; s++) {
        const spec = specs[s]!;
        const values =
          spec.step === 0
            ? direct(kernels, setting, range, spec, queries, first(nearest!, spec.neighbours), leads)
            : yield* iterated(kernels, index, setting, range, spec, batch, leads);
        outputs[s]!.set(values, at);
        yield (round + (s + 1) / specs.length) / rounds;
      }
    }
  } finally {
    index.close();
  }
  return outputs;
}

/** Every lead is a target of its own: one search and one factorisation for all. */
function direct(
  kernels: Kernels,
  setting: ForecastSetting,
  range: ValueRange,
  spec: LocalSpec,
  queries: Float64Array,
  neighbours: NearestNeighbours,
  leads: Int32Array,
): Float64Array {
  const base = setting.target * setting.count;
  const values = mapFutures(
    kernels,
    setting,
    spec,
    queries,
    neighbours,
    leads.map((lead) => base + lead),
  );
  // Held at the edge of the record's range, as iterated paths are.
  const low = range.low[setting.target]!;
  const high = range.high[setting.target]!;
  return values.map((x) => Math.min(high, Math.max(low, x)));
}

/** `step` samples of every channel at a time, from the state forecast so far. */
function* iterated(
  kernels: Kernels,
  index: NeighbourIndex,
  setting: ForecastSetting,
  range: ValueRange,
  spec: LocalSpec,
  origins: Int32Array,
  leads: Int32Array,
): Generator<number, Float64Array, void> {
  const { channels, count } = setting;
  const { step } = spec;
  const last = leads[leads.length - 1]!;
  const paths = new Paths(setting, range, origins, last + step);
  const offsets = Int32Array.from(
    { length: channels * step },
    (_, i) => Math.floor(i / step) * count + (i % step) + 1,
  );
  for (let lead = 0; lead < last; lead += step) {
    const queries = paths.coordinates(lead);
    const neighbours = search(index, setting, origins, queries, spec.neighbours);
    const next = mapFutures(kernels, setting, spec, queries, neighbours, offsets);
    for (let i = 0; i < origins.length; i++)
      for (let c = 0; c < channels; c++)
        for (let s = 0; s < step; s++)
          paths.set(i, c, lead + s + 1, next[i * offsets.length + c * step + s]!);
    if ((lead / step) % 2 === 1) yield lead / last;
  }
  return paths.targets(leads);
}

/** Neighbours of the queries, none of them near the origin in time. */
function search(
  index: NeighbourIndex,
  setting: ForecastSetting,
  origins: Int32Array,
  queries: Float64Array,
  k: number,
): NearestNeighbours {
  return index.nearestTo({ coordinates: queries, times: Int32Array.from(origins) }, k, setting.exclusion);
}

/** The first `k` of more neighbours. */
function first(nearest: NearestNeighbours, k: number): NearestNeighbours {
  if (nearest.k === k) return nearest;
  const rows = nearest.indices.length / nearest.k;
  const indices = new Int32Array(rows * k);
  const distances = new Float64Array(rows * k);
  for (let i = 0; i < rows; i++) {
    indices.set(nearest.indices.subarray(i * nearest.k, i * nearest.k + k), i * k);
    distances.set(nearest.distances.subarray(i * nearest.k, i * nearest.k + k), i * k);
  }
  return { k, indices, distances };
}

function mapFutures(
  kernels: Kernels,
  setting: ForecastSetting,
  spec: LocalSpec,
  queries: Float64Array,
  neighbours: NearestNeighbours,
  targetOffsets: Int32Array,
): Float64Array {
  const { predictions } = kernels.localFits({
    vectors: { data: setting.data, starts: setting.library, offsets: setting.offsets },
    targetOffsets,
    queries,
    neighbours,
    order: spec.order,
    weights: 'tricube',
    ridge: spec.ridge,
  });
  // No neighbour, or a fit that broke down: the mean (0 in scaled units) is what is left to say.
  for (let i = 0; i < predictions.length; i++) if (!Number.isFinite(predictions[i]!)) predictions[i] = 0;
  return predictions;
}

function coordinatesOf(setting: ForecastSetting, origins: Int32Array): Float64Array {
  const { data, offsets } = setting;
  const m = offsets.length;
  const out = new Float64Array(origins.length * m);
  for (let i = 0; i < origins.length; i++)
    for (let d = 0; d < m; d++) out[i * m + d] = data[origins[i]! + offsets[d]!]!;
  return out;
}
