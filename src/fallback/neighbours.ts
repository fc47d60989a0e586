import type { DelayVectors, Metric, NeighbourIndex } from '../base/kernels.ts';
import { buildTree } from './tree.ts';
import { indexedPoints } from './tree-distances.ts';
import { searchNearest } from './tree-nearest.ts';
import { searchWithin } from './tree-within.ts';

export function neighbourIndex(vectors: DelayVectors, metric: Metric): NeighbourIndex {
  const tree = buildTree(vectors);
  const euclidean = metric === 'euclidean';
  return {
    count: tree.count,
    dimension: tree.dimension,
    metric,
    nearest: (queries, k, exclusion) =>
      searchNearest(tree, euclidean, indexedPoints(tree, queries), k, exclusion),
    nearestTo: (queries, k, exclusion) =>
      searchNearest(tree, euclidean, queries, k, queries.times ? exclusion : -1),
    within: (queries, radius, exclusion) =>
      searchWithin(tree, euclidean, indexedPoints(tree, queries), radius, exclusion),
    withinOf: (queries, radius, exclusion) =>
      searchWithin(tree, euclidean, queries, radius, queries.times ? exclusion : -1),
    close: () => {},
  };
}
