import { LeadspanError } from '../base/errors.ts';
import type { Kernels, NeighbourIndex } from '../base/kernels.ts';
import {
  checkCorrelation,
  checkDivergence,
  checkFlow,
  checkJointCounts,
  checkMatrix,
  checkNeighbourhoodDivergence,
  checkReferences,
  checkSeries,
  checkSpectrum,
  checkSurrogate,
} from './check-series.ts';
import {
  checkExclusion,
  checkFalseNeighbours,
  checkIndexedVectors,
  checkLocalFits,
  checkNeighbourCount,
  checkOrdinals,
  checkQueryPoints,
  checkVectors,
} from './check-vectors.ts';
import { choice, notNegative } from './checks.ts';

function closed(what: string): never {
  throw new LeadspanError('CLOSED', `${what} closed; open a new one.`);
}

/**
 * Wraps a backend with argument checks, so that every backend refuses the same inputs in the same words and
 * no kernel is ever handed an index outside its arrays. The wrapper is the only holder of the backend: after
 * `close` its memory is free to go.
 */
export function validated(kernels: Kernels): Kernels {
  let inner: Kernels | undefined = kernels;
  const open = () => inner ?? closed('These kernels are');
  return {
    backend: kernels.backend,
    packDelayVectors(vectors) {
      const k = open();
      checkVectors('vectors', vectors);
      return k.packDelayVectors(vectors);
    },
    neighbourIndex(vectors, metric) {
      const k = open();
      checkIndexedVectors('vectors', vectors);
      choice('metric', metric, ['euclidean', 'maximum']);
      return validatedIndex(k.neighbourIndex(vectors, metric), open);
    },
    correlationCounts(input) {
      const k = open();
      checkCorrelation(input);
      return k.correlationCounts(input);
    },
    correlationCountsFrom(input, references) {
      const k = open();
      checkCorrelation(input);
      checkReferences(references, input);
      return k.correlationCountsFrom(input, references);
    },
    falseNeighbourCounts(input) {
      const k = open();
      checkFalseNeighbours(input);
      return k.falseNeighbourCounts(input);
    },
    jointCounts(input) {
      const k = open();
      checkJointCounts(input);
      return k.jointCounts(input);
    },
    divergenceSums(input) {
      const k = open();
      checkDivergence(input);
      return k.divergenceSums(input);
    },
    neighbourhoodDivergence(input) {
      const k = open();
      checkNeighbourhoodDivergence(input);
      return k.neighbourhoodDivergence(input);
    },
    localFits(input) {
      const k = open();
      checkLocalFits(input);
      return k.localFits(input);
    },
    orthonormalise(matrix, rows, columns) {
      const k = open();
      checkMatrix(matrix, rows, columns);
      return k.orthonormalise(matrix, rows, columns);
    },
    advanceFlow(input) {
      const k = open();
      checkFlow(input);
      return k.advanceFlow(input);
    },
    realSpectrum(series) {
      const k = open();
      checkSeries(series);
      return k.realSpectrum(series);
    },
    realSeries(spectrum, length) {
      const k = open();
      checkSpectrum(spectrum, length);
      return k.realSeries(spectrum, length);
    },
    surrogate(input) {
      const k = open();
      checkSurrogate(input);
      return k.surrogate(input);
    },
    memory: () => open().memory(),
    close() {
      inner?.close();
      inner = undefined;
    },
  };
}

/** An index lives no longer than the kernels it came from. */
function validatedIndex(index: NeighbourIndex, kernelsOpen: () => Kernels): NeighbourIndex {
  let inner: NeighbourIndex | undefined = index;
  const open = () => {
    kernelsOpen();
    return inner ?? closed('This neighbour index is');
  };
  return {
    count: index.count,
    dimension: index.dimension,
    metric: index.metric,
    nearest(queries, k, exclusion) {
      const own = open();
      checkOrdinals(queries, own);
      checkNeighbourCount(k);
      checkExclusion(exclusion);
      return own.nearest(queries, k, exclusion);
    },
    nearestTo(queries, k, exclusion) {
      const own = open();
      checkQueryPoints(queries, own);
      checkNeighbourCount(k);
      checkExclusion(exclusion);
      return own.nearestTo(queries, k, exclusion);
    },
    within(queries, radius, exclusion) {
      const own = open();
      checkOrdinals(queries, own);
      notNegative('radius', radius);
      checkExclusion(exclusion);
      return own.within(queries, radius, exclusion);
    },
    withinOf(queries, radius, exclusion) {
      const own = open();
      checkQueryPoints(queries, own);
      notNegative('radius', radius);
      checkExclusion(exclusion);
      return own.withinOf(queries, radius, exclusion);
    },
    close() {
      inner?.close();
      inner = undefined;
    },
  };
}
