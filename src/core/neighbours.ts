import type {
  DelayVectors,
  Kernels,
  Metric,
  NearestNeighbours,
  NeighbourIndex,
  QueryPoints,
  RadiusNeighbours,
} from '../base/kernels.ts';
import { LEAF } from '../fallback/tree.ts';
import { squaredLimit } from '../fallback/tree-distances.ts';
import { type Heap, Scope } from './heap.ts';
import type { WasmContext } from './wasm.ts';

/** i32 words of a tree's header; layout at the top of `assembly/tree.ts`. */
const HEADER = 10;
/** Bytes of an inner node: children, then both boxes of each coordinate. */
const nodeBytes = (dimension: number) => 16 + 32 * dimension;
/** Neighbours a radius search collects before it hands them over: 12 bytes each. */
const ROOM = 65_536;

export function createNeighbours(context: WasmContext): Pick<Kernels, 'neighbourIndex'> {
  return { neighbourIndex: (vectors, metric) => new TreeIndex(context, vectors, metric) };
}

/** A tree in linear memory, given back on `close`. */
class TreeIndex implements NeighbourIndex {
  readonly count: number;
  readonly dimension: number;
  readonly metric: Metric;
  readonly #context: WasmContext;
  readonly #heap: Heap;
  readonly #blocks: Scope;
  readonly #tree: number;
  readonly #leafCount: number;
  readonly #maximum: number;

  constructor(context: WasmContext, { data, starts, offsets }: DelayVectors, metric: Metric) {
    this.count = starts.length;
    this.dimension = offsets.length;
    this.metric = metric;
    this.#maximum = metric === 'maximum' ? 1 : 0;
    this.#context = context;
    this.#heap = context.heap;
    this.#leafCount = Math.max(1, Math.ceil(this.count / LEAF));
    this.#blocks = new Scope(context.heap);
    try {
      this.#tree = this.#lay();
      context.heap.scope((scope) => {
        const first = starts[0] ?? 0;
        const last = starts[starts.length - 1] ?? 0;
        context.call(
          'treeBuild',
          this.#tree,
          scope.put(data),
          scope.put(starts),
          scope.put(offsets),
          scope.take(4 * (last - first + 1)),
          scope.take(16 * this.dimension),
        );
      });
    } catch (error) {
      this.#blocks.release();
      throw error;
    }
  }

  /** Takes the memory of the tree and writes its header. */
  #lay(): number {
    const { count, dimension } = this;
    const leafCount = this.#leafCount;
    const take = (bytes: number) => this.#blocks.take(bytes);
    const header = take(4 * HEADER);
    const slots = leafCount * LEAF;
    const words = [
      count,
      dimension,
      0,
      leafCount,
      take(4 * slots),
      take(4 * slots),
      take(4 * count),
      take(8 * dimension * slots),
      take((leafCount - 1) * nodeBytes(dimension)),
      0,
    ];
    this.#heap.i32(header, HEADER).set(words);
    return header;
  }

  nearest(queries: Int32Array, k: number, exclusion: number): NearestNeighbours {
    return this.#nearest(queries.length, k, (scope, indices, distances, scratch) =>
      this.#context.call(
        'treeNearest',
        this.#tree,
        this.#maximum,
        scope.put(queries),
        queries.length,
        k,
        exclusion,
        indices,
        distances,
        scratch,
        scope.take(4 * this.#leafCount),
        scope.take(4 * queries.length),
      ),
    );
  }

  nearestTo({ coordinates, times }: QueryPoints, k: number, exclusion: number): NearestNeighbours {
    const count = coordinates.length / this.dimension;
    return this.#nearest(count, k, (scope, indices, distances, scratch) =>
      this.#context.call(
        'treeNearestTo',
        this.#tree,
        this.#maximum,
        scope.put(coordinates),
        times ? scope.put(times) : 0,
        count,
        k,
        times ? exclusion : -1,
        indices,
        distances,
        scratch,
      ),
    );
  }

  #nearest(
    count: number,
    k: number,
    run: (scope: Scope, indices: number, distances: number, scratch: number) => void,
  ): NearestNeighbours {
    return this.#heap.scope((scope) => {
      const indices = scope.take(4 * count * k);
      const distances = scope.take(8 * count * k);
      run(scope, indices, distances, scope.take(this.#context.call('treeNearestScratch', this.dimension, k)));
      return {
        k,
        indices: scope.copyI32(indices, count * k),
        distances: scope.copyF64(distances, count * k),
      };
    });
  }

  within(queries: Int32Array, radius: number, exclusion: number): RadiusNeighbours {
    return this.#within(queries.length, radius, exclusion, (scope) => [scope.put(queries), 0, 0]);
  }

  withinOf({ coordinates, times }: QueryPoints, radius: number, exclusion: number): RadiusNeighbours {
    const count = coordinates.length / this.dimension;
    return this.#within(count, radius, times ? exclusion : -1, (scope) => [
      0,
      scope.put(coordinates),
      times ? scope.put(times) : 0,
    ]);
  }

  /** The kernel fills a room of fixed size and says how far it came; rooms are joined here. */
  #within(
    count: number,
    radius: number,
    exclusion: number,
    put: (scope: Scope) => [queries: number, coordinates: number, times: number],
  ): RadiusNeighbours {
    // Room for every point and a leaf more: one query always fits.
    const room = Math.max(ROOM, this.count + LEAF);
    return this.#heap.scope((scope) => {
      const points = put(scope);
      const indices = scope.take(4 * room);
      const distances = scope.take(8 * room);
      const rowEnds = scope.take(4 * count);
      const scratch = scope.take(this.#context.call('treeWithinScratch', this.dimension));
      const limit = this.#maximum ? radius : squaredLimit(radius);
      const rowStarts = new Int32Array(count + 1);
      const parts: { readonly indices: Int32Array; readonly distances: Float64Array }[] = [];
      let total = 0;
      for (let from = 0; from < count; ) {
        const to = this.#context.call(
          'treeWithin',
          this.#tree,
          this.#maximum,
          ...points,
          from,
          count,
          limit,
          exclusion,
          indices,
          distances,
          rowEnds,
          room,
          scratch,
        );
        const ends = this.#heap.i32(rowEnds, count);
        for (let q = from; q < to; q++) rowStarts[q + 1] = total + ends[q]!;
        const found = ends[to - 1]!;
        parts.push({ indices: scope.copyI32(indices, found), distances: scope.copyF64(distances, found) });
        total += found;
        from = to;
      }
      if (parts.length === 1) return { rowStarts, ...parts[0]! };
      const joined = { rowStarts, indices: new Int32Array(total), distances: new Float64Array(total) };
      let at = 0;
      for (const part of parts) {
        joined.indices.set(part.indices, at);
        joined.distances.set(part.distances, at);
        at += part.indices.length;
      }
      return joined;
    });
  }

  close(): void {
    this.#blocks.release();
  }
}
