import { badInput } from '../base/errors.ts';
import type {
  DelayVectors,
  FalseNeighbourInput,
  LocalFitInput,
  NearestNeighbours,
  NeighbourIndex,
  QueryPoints,
} from '../base/kernels.ts';
import {
  allFinite,
  choice,
  finite,
  float64Array,
  inRange,
  int32Array,
  notNegative,
  object,
  span,
  whole,
} from './checks.ts';

/** Most neighbours asked for at once: beyond, sorted insertion is the wrong method. */
const MOST_NEIGHBOURS = 256;

/** Every coordinate inside `data`. */
export function checkVectorBounds(field: string, vectors: DelayVectors): void {
  object(field, vectors);
  const { data, starts, offsets } = vectors;
  float64Array(`${field}.data`, data);
  int32Array(`${field}.starts`, starts);
  int32Array(`${field}.offsets`, offsets);
  if (offsets.length === 0) badInput(`${field}.offsets`, 'of length 1 or more', offsets);
  checkReach(`${field}.starts`, starts, offsets, data.length);
}

/** Every start + offset inside `data`. */
function checkReach(field: string, starts: Int32Array, offsets: Int32Array, length: number): void {
  if (starts.length === 0) return;
  const { low, high } = span(offsets);
  const at = span(starts);
  if (at.low < 0 || at.low + low < 0 || at.high + high >= length)
    inRange(field, starts, Math.max(0, -low), length - 1 - high);
}

/** The same, and every coordinate present. The full pass is paid only where `data` has missing samples. */
export function checkVectors(field: string, vectors: DelayVectors): void {
  checkVectorBounds(field, vectors);
  const { data, starts, offsets } = vectors;
  if (allFinite(data)) return;
  for (let i = 0; i < starts.length; i++)
    for (let d = 0; d < offsets.length; d++) {
      const x = data[starts[i]! + offsets[d]!]!;
      if (!Number.isFinite(x))
        badInput(`${field}.data[${starts[i]! + offsets[d]!}]`, `finite (point ${i} uses it)`, x);
    }
}

/** Time order is what makes `starts` usable as times. */
export function checkIndexedVectors(field: string, vectors: DelayVectors): void {
  checkVectors(field, vectors);
  const { starts } = vectors;
  for (let i = 1; i < starts.length; i++)
    if (starts[i]! <= starts[i - 1]!)
      badInput(`${field}.starts[${i}]`, `above ${starts[i - 1]} (strictly increasing)`, starts[i]);
}

export function checkOrdinals(queries: Int32Array, index: NeighbourIndex): void {
  int32Array('queries', queries);
  inRange('queries', queries, 0, index.count - 1);
}

export function checkQueryPoints(queries: QueryPoints, index: NeighbourIndex): void {
  object('queries', queries);
  const { coordinates, times } = queries;
  float64Array('queries.coordinates', coordinates);
  if (coordinates.length % index.dimension !== 0)
    badInput('queries.coordinates', `of a length divisible by the dimension ${index.dimension}`, coordinates);
  finite('queries.coordinates', coordinates);
  if (times !== undefined) int32Array('queries.times', times, coordinates.length / index.dimension);
}

export function checkNeighbourCount(k: number): void {
  whole('k', k, 1, MOST_NEIGHBOURS);
}

export function checkExclusion(exclusion: number): void {
  whole('exclusion', exclusion, -1);
}

export function checkFalseNeighbours(input: FalseNeighbourInput): void {
  object('input', input);
  const { vectors, neighbours, distances, nextOffset, threshold, judgeableDistance } = input;
  checkVectorBounds('vectors', vectors);
  const count = vectors.starts.length;
  int32Array('neighbours', neighbours, count);
  inRange('neighbours', neighbours, -1, count - 1);
  float64Array('distances', distances, count);
  whole('nextOffset', nextOffset, -vectors.data.length, vectors.data.length);
  checkReach('nextOffset: vectors.starts', vectors.starts, Int32Array.of(nextOffset), vectors.data.length);
  notNegative('threshold', threshold);
  if (judgeableDistance !== Number.POSITIVE_INFINITY) notNegative('judgeableDistance', judgeableDistance);
  for (let i = 0; i < count; i++) if (neighbours[i]! >= 0) notNegative(`distances[${i}]`, distances[i]);
}

export function checkLocalFits(input: LocalFitInput): void {
  object('input', input);
  const { vectors, targetOffsets, queries, neighbours, order, weights, ridge, coefficients } = input;
  checkVectorBounds('vectors', vectors);
  int32Array('targetOffsets', targetOffsets);
  if (targetOffsets.length === 0) badInput('targetOffsets', 'of length 1 or more', targetOffsets);
  float64Array('queries', queries);
  const m = vectors.offsets.length;
  if (queries.length % m !== 0) badInput('queries', `of a length divisible by the dimension ${m}`, queries);
  finite('queries', queries);
  checkNeighbours(neighbours, queries.length / m, vectors.starts.length);
  choice('order', order, [0, 1]);
  choice('weights', weights, ['uniform', 'tricube']);
  if (typeof ridge !== 'number' || !(ridge >= 0 && ridge <= 1)) badInput('ridge', 'from 0 to 1', ridge);
  choice('coefficients', coefficients, [undefined, true, false]);
  checkUsed(vectors, targetOffsets, neighbours);
}

function checkNeighbours(neighbours: NearestNeighbours, queries: number, count: number): void {
  object('neighbours', neighbours);
  const { k, indices, distances } = neighbours;
  whole('neighbours.k', k, 1, MOST_NEIGHBOURS);
  int32Array('neighbours.indices', indices, queries * k);
  inRange('neighbours.indices', indices, -1, count - 1);
  float64Array('neighbours.distances', distances, queries * k);
  for (let i = 0; i < indices.length; i++) {
    if (indices[i]! < 0) continue;
    notNegative(`neighbours.distances[${i}]`, distances[i]);
    if (i % k !== 0 && indices[i - 1]! < 0)
      badInput(`neighbours.indices[${i}]`, '−1 after a −1 of the same query', indices[i]);
    if (i % k !== 0 && distances[i]! < distances[i - 1]!)
      badInput(`neighbours.distances[${i}]`, `at least ${distances[i - 1]} (nearest first)`, distances[i]);
  }
}

/** Coordinates and targets of the neighbours in use: inside `data` and finite. */
function checkUsed(vectors: DelayVectors, targetOffsets: Int32Array, { indices }: NearestNeighbours): void {
  const { data, starts, offsets } = vectors;
  const target = span(targetOffsets);
  for (let i = 0; i < indices.length; i++) {
    if (indices[i]! < 0) continue;
    const start = starts[indices[i]!]!;
    if (start + target.low < 0 || start + target.high >= data.length)
      badInput(
        'targetOffsets',
        `inside data of length ${data.length} for every neighbour in use (start ${start})`,
        start + target.low < 0 ? target.low : target.high,
      );
  }
  if (allFinite(data)) return;
  for (let i = 0; i < indices.length; i++) {
    if (indices[i]! < 0) continue;
    const start = starts[indices[i]!]!;
    for (const used of [offsets, targetOffsets])
      for (let d = 0; d < used.length; d++)
        if (!Number.isFinite(data[start + used[d]!]!))
          badInput(
            `vectors.data[${start + used[d]!}]`,
            `finite (neighbour ${indices[i]} uses it)`,
            data[start + used[d]!],
          );
  }
}
