import { afterAll, beforeAll, describe, expect, test } from 'vitest';
import { isLeadspanError } from '../../src/base/errors.ts';
import type { Kernels } from '../../src/base/kernels.ts';
import { openKernels } from '../../src/core/open.ts';
import { allBackends } from './neighbour-cases.ts';

let backends: readonly Kernels[] = [];
beforeAll(async () => {
  backends = await allBackends();
});
afterAll(() => {
  for (const kernels of backends) kernels.close();
});

/** Every backend refuses in the same words, naming the field. */
function refuses(field: string, run: (kernels: Kernels) => unknown): void {
  const messages = backends.map((kernels) => {
    try {
      run(kernels);
    } catch (error) {
      if (!isLeadspanError(error)) throw error;
      expect(error.code).toBe('BAD_INPUT');
      expect(error.field).toContain(field);
      return error.message;
    }
    throw new Error(`${kernels.backend} took a bad ${field}`);
  });
  expect(new Set(messages).size).toBe(1);
}

const f = (...values: number[]) => Float64Array.from(values);
const i = (...values: number[]) => Int32Array.from(values);
const vectors = { data: f(0, 1, 2, 3, 4, 5), starts: i(1, 2, 3), offsets: i(0, -1, 2) };

describe('delay vectors', () => {
  test.each([
    ['vectors', undefined],
    ['vectors.data', { ...vectors, data: [1, 2, 3] }],
    ['vectors.data', { ...vectors, data: new Float32Array(6) }],
    ['vectors.starts', { ...vectors, starts: f(1, 2) }],
    ['vectors.offsets', { ...vectors, offsets: i() }],
    ['vectors.starts[0]', { ...vectors, starts: i(0, 2) }],
    ['vectors.starts[0]', { ...vectors, starts: i(-1), offsets: i(1) }],
    ['vectors.starts[1]', { ...vectors, starts: i(1, 4) }],
    ['vectors.starts[1]', { ...vectors, starts: i(1, 2 ** 31 - 1) }],
    ['vectors.starts[0]', { ...vectors, offsets: i(0, 2 ** 31 - 1) }],
    ['vectors.starts[0]', { ...vectors, offsets: i(0, -(2 ** 31)) }],
    ['vectors.data[4]', { ...vectors, data: f(0, 1, 2, 3, Number.NaN, 5) }],
    ['vectors.data[0]', { ...vectors, data: f(Number.POSITIVE_INFINITY, 1, 2, 3, 4, 5) }],
  ])('%s', (field, bad) => {
    refuses(field, (kernels) => kernels.packDelayVectors(bad as never));
    refuses(field, (kernels) => kernels.neighbourIndex(bad as never, 'euclidean'));
  });

  test('an index needs starts in time order and a known metric', () => {
    refuses('vectors.starts[1]', (k) => k.neighbourIndex({ ...vectors, starts: i(2, 1) }, 'maximum'));
    refuses('vectors.starts[2]', (k) => k.neighbourIndex({ ...vectors, starts: i(1, 2, 2) }, 'maximum'));
    refuses('metric', (k) => k.neighbourIndex(vectors, 'manhattan' as never));
  });

  test('a missing sample that no point uses is no matter', () => {
    const data = f(0, 1, 2, 3, 4, 5, Number.NaN);
    for (const kernels of backends) {
      expect(kernels.packDelayVectors({ ...vectors, data }).length).toBe(9);
      kernels.neighbourIndex({ ...vectors, data }, 'euclidean').close();
    }
  });
});

describe('neighbour index', () => {
  const onIndex = (run: (index: ReturnType<Kernels['neighbourIndex']>) => unknown) => (kernels: Kernels) => {
    const index = kernels.neighbourIndex(vectors, 'euclidean');
    try {
      return run(index);
    } finally {
      index.close();
    }
  };

  test.each([
    ['queries', [0, 1]],
    ['queries[1]', i(0, 3)],
    ['queries[0]', i(-1)],
  ])('%s', (field, queries) => {
    refuses(
      field,
      onIndex((index) => index.nearest(queries as never, 1, 0)),
    );
    refuses(
      field,
      onIndex((index) => index.within(queries as never, 1, 0)),
    );
  });

  test.each([0, 257, 1.5, Number.NaN, '3'])('k = %s', (k) => {
    refuses(
      'k',
      onIndex((index) => index.nearest(i(0), k as never, 0)),
    );
    refuses(
      'k',
      onIndex((index) => index.nearestTo({ coordinates: f(0, 0, 0) }, k as never, 0)),
    );
  });

  test.each([-2, 0.5, 2 ** 31, Number.NaN, undefined])('exclusion = %s', (exclusion) => {
    refuses(
      'exclusion',
      onIndex((index) => index.nearest(i(0), 1, exclusion as never)),
    );
    refuses(
      'exclusion',
      onIndex((index) => index.withinOf({ coordinates: f(0, 0, 0) }, 1, exclusion as never)),
    );
  });

  test.each([-1, Number.POSITIVE_INFINITY, Number.NaN, '1'])('radius = %s', (radius) => {
    refuses(
      'radius',
      onIndex((index) => index.within(i(0), radius as never, 0)),
    );
    refuses(
      'radius',
      onIndex((index) => index.withinOf({ coordinates: f(0, 0, 0) }, radius as never, 0)),
    );
  });

  test.each([
    ['queries', null],
    ['queries.coordinates', { coordinates: f(1, 2) }],
    ['queries.coordinates[1]', { coordinates: f(1, Number.NaN, 2) }],
    ['queries.times', { coordinates: f(1, 2, 3), times: i(1, 2) }],
  ])('%s', (field, queries) => {
    refuses(
      field,
      onIndex((index) => index.nearestTo(queries as never, 1, 0)),
    );
    refuses(
      field,
      onIndex((index) => index.withinOf(queries as never, 1, 0)),
    );
  });
});

describe('counts and fits over vectors', () => {
  const pairs = {
    vectors,
    neighbours: i(1, 2, -1),
    distances: f(1, 1, Number.POSITIVE_INFINITY),
    nextOffset: -1,
    threshold: 10,
    judgeableDistance: 1,
  };
  test.each([
    ['neighbours', { neighbours: i(1, 2) }],
    ['neighbours[0]', { neighbours: i(3, 2, -1) }],
    ['neighbours[2]', { neighbours: i(1, 2, -2) }],
    ['distances', { distances: f(1, 1) }],
    ['distances[1]', { distances: f(1, Number.POSITIVE_INFINITY, 1) }],
    ['distances[0]', { distances: f(-1, 1, 1) }],
    ['nextOffset', { nextOffset: -2 }],
    ['nextOffset', { nextOffset: 3 }],
    ['nextOffset', { nextOffset: 0.5 }],
    ['threshold', { threshold: Number.NaN }],
    ['judgeableDistance', { judgeableDistance: -1 }],
  ])('falseNeighbourCounts: %s %o', (field, bad) => {
    for (const kernels of backends) expect(kernels.falseNeighbourCounts(pairs).pairs).toBe(2);
    refuses(field, (kernels) => kernels.falseNeighbourCounts({ ...pairs, ...bad }));
  });

  const joint = { symbols: Uint8Array.of(0, 1, 255, 3), bins: 4, lags: i(0, 9) };
  test.each([
    ['symbols[3]', { bins: 3 }],
    ['symbols', { symbols: i(0, 1) }],
    ['bins', { bins: 1 }],
    ['bins', { bins: 129 }],
    ['lags[1]', { lags: i(0, -1) }],
  ])('jointCounts: %s %o', (field, bad) => {
    for (const kernels of backends) expect(kernels.jointCounts(joint).length).toBe(32);
    refuses(field, (kernels) => kernels.jointCounts({ ...joint, ...bad } as never));
  });

  const fit = {
    vectors,
    targetOffsets: i(1),
    queries: f(1, 0, 3),
    neighbours: { k: 2, indices: i(0, 2), distances: f(0, 3) },
    order: 0,
    weights: 'uniform',
    ridge: 0,
  } as const;
  const near = (change: object) => ({ neighbours: { ...fit.neighbours, ...change } });
  test.each([
    ['targetOffsets', { targetOffsets: i() }],
    ['targetOffsets', { targetOffsets: i(3) }],
    ['targetOffsets', { targetOffsets: i(-2) }],
    ['queries', { queries: f(1, 0) }],
    ['queries[2]', { queries: f(1, 0, Number.NaN) }],
    ['neighbours.k', near({ k: 0 })],
    ['neighbours.indices', near({ indices: i(0) })],
    ['neighbours.indices[1]', near({ indices: i(0, 3) })],
    ['neighbours.indices[1]', near({ indices: i(-1, 0) })],
    ['neighbours.distances', near({ distances: f(0) })],
    ['neighbours.distances[1]', near({ distances: f(0, Number.NaN) })],
    ['neighbours.distances[1]', near({ distances: f(2, 1) })],
    ['order', { order: 2 }],
    ['weights', { weights: 'gaussian' }],
    ['ridge', { ridge: 1.5 }],
    ['coefficients', { coefficients: 'yes' }],
    ['vectors.data[4]', { vectors: { ...vectors, data: f(0, 1, 2, 3, Number.NaN, 5) } }],
  ])('localFits: %s %o', (field, bad) => {
    for (const kernels of backends) expect(kernels.localFits(fit).predictions.length).toBe(1);
    refuses(field, (kernels) => kernels.localFits({ ...fit, ...bad } as never));
  });
});

describe('sums over series', () => {
  const correlation = {
    series: f(0, 1, 2, 3, 4, 5),
    valid: Uint8Array.of(1, 1, 0, 1),
    delay: 1,
    dimensions: 3,
    exclusion: 0,
    smallestExponent: -4,
  };
  test.each([
    ['series', { series: [1, 2] }],
    ['series', { delay: 4 }],
    ['valid', { valid: new Uint8Array(5) }],
    ['valid[0]', { valid: Uint8Array.of(2, 1, 1, 1) }],
    ['delay', { delay: 0 }],
    ['dimensions', { dimensions: 33 }],
    ['exclusion', { exclusion: -1 }],
    ['smallestExponent', { smallestExponent: 1008 }],
    ['smallestExponent', { smallestExponent: -4.5 }],
    ['series[3]', { series: f(0, 1, 2, Number.NaN, 4, 5) }],
  ])('correlationCounts: %s %o', (field, bad) => {
    for (const kernels of backends) expect(kernels.correlationCounts(correlation).pairs).toBe(3);
    refuses(field, (kernels) => kernels.correlationCounts({ ...correlation, ...bad } as never));
    refuses(field, (kernels) => kernels.correlationCountsFrom({ ...correlation, ...bad } as never, i(0)));
  });

  test('correlationCountsFrom: references', () => {
    refuses('references[0]', (kernels) => kernels.correlationCountsFrom(correlation, i(4)));
    refuses('references[1]', (kernels) => kernels.correlationCountsFrom(correlation, i(0, 2)));
  });

  const followed = {
    data: f(0, 1, 3, 2, 5, Number.NaN, 1, 1),
    first: i(0, 1),
    second: i(2, 3),
    lengths: i(2, 1),
    offsets: i(0),
    steps: 2,
    blockStarts: i(0, 1, 2),
  };
  test.each([
    ['second', { second: i(2) }],
    ['lengths', { lengths: i(2) }],
    ['lengths[0]', { lengths: i(3, 1) }],
    ['lengths[1]', { lengths: i(2, -1) }],
    ['offsets', { offsets: i() }],
    ['first[1]', { first: i(0, 7) }],
    ['first[0]', { first: i(-1, 1) }],
    ['first[0]', { offsets: i(-1) }],
    ['second[1]', { lengths: i(2, 2) }],
    ['second[0]', { offsets: i(1) }],
    ['blockStarts', { blockStarts: i() }],
    ['blockStarts[0]', { blockStarts: i(1, 2) }],
    ['blockStarts[1]', { blockStarts: i(0, 1) }],
    ['blockStarts[2]', { blockStarts: i(0, 2, 1, 2) }],
  ])('divergenceSums: %s %o', (field, bad) => {
    for (const kernels of backends) expect(kernels.divergenceSums(followed).logSums.length).toBe(6);
    refuses(field, (kernels) => kernels.divergenceSums({ ...followed, ...bad }));
  });

  const neighbourhood = {
    data: followed.data,
    references: i(0, 1),
    rowStarts: i(0, 1, 2),
    neighbours: i(2, 3),
    lengths: i(2, 1),
    steps: 2,
    blockStarts: i(0, 2),
  };
  test.each([
    ['rowStarts', { rowStarts: i(0, 2) }],
    ['rowStarts[2]', { rowStarts: i(0, 1, 1) }],
    ['neighbours[1]', { lengths: i(2, 2) }],
    ['references[1]', { references: i(0, 4) }],
    ['references[0]', { references: i(-1, 1) }],
    ['blockStarts[1]', { blockStarts: i(0, 1) }],
  ])('neighbourhoodDivergence: %s %o', (field, bad) => {
    for (const kernels of backends)
      expect(kernels.neighbourhoodDivergence(neighbourhood).counts.length).toBe(3);
    refuses(field, (kernels) => kernels.neighbourhoodDivergence({ ...neighbourhood, ...bad }));
  });

  test('orthonormalise', () => {
    refuses('rows', (kernels) => kernels.orthonormalise(f(1, 0), 0, 2));
    refuses('columns', (kernels) => kernels.orthonormalise(f(1, 0), 1, 1.5));
    refuses('matrix', (kernels) => kernels.orthonormalise(f(1, 0, 0), 2, 2));
    refuses('matrix[1]', (kernels) => kernels.orthonormalise(f(1, Number.NaN, 0, 1), 2, 2));
  });

  const flow = {
    field: 'lorenz',
    parameters: f(10, 28, 8 / 3),
    state: f(1, 1, 1),
    tangents: f(1, 0, 0),
    tangentCount: 1,
    step: 0.01,
    stepsPerBlock: 1,
    blocks: 1,
  } as const;
  test.each([
    ['field', { field: 'duffing' }],
    ['field', { field: 'toString' }],
    ['parameters', { parameters: f(10, 28) }],
    ['state', { state: f(1, 1) }],
    ['state[0]', { state: f(Number.NaN, 1, 1) }],
    ['state', { field: 'lorenz-96', parameters: f(8), state: f(1, 2, 3) }],
    ['tangents', { tangents: f(1, 0) }],
    ['tangentCount', { tangentCount: 4 }],
    ['step', { step: 0 }],
    ['step', { step: Number.NaN }],
    ['stepsPerBlock', { stepsPerBlock: 0 }],
    ['blocks', { blocks: -1 }],
  ])('advanceFlow: %s %o', (field, bad) => {
    for (const kernels of backends) expect(kernels.advanceFlow(flow).logNorms.length).toBe(1);
    refuses(field, (kernels) => kernels.advanceFlow({ ...flow, ...bad } as never));
  });

  test('Fourier transforms take 2^a·3^b·5^c', () => {
    for (const kernels of backends) expect(kernels.realSpectrum(new Float64Array(30)).real.length).toBe(16);
    for (const length of [0, 1, 7, 14, 77])
      refuses('series', (kernels) => kernels.realSpectrum(new Float64Array(length)));
    refuses('series[1]', (kernels) => kernels.realSpectrum(f(0, Number.NaN)));
    const spectrum = { real: new Float64Array(9), imaginary: new Float64Array(9) };
    for (const length of [17, 0, 16.5]) refuses('length', (kernels) => kernels.realSeries(spectrum, length));
    refuses('spectrum.real', (kernels) => kernels.realSeries(spectrum, 20));
    refuses('spectrum.imaginary', (k) => k.realSeries({ ...spectrum, imaginary: f(1) }, 16));
  });

  const surrogate = {
    values: f(1, 2, 3, 4, 5, 6, 7, 9),
    permutation: i(7, 6, 5, 4, 3, 2, 1, 0),
    iterations: 5,
  };
  test.each([
    ['values', { values: f(1, 2, 3, 4, 5, 6) }],
    ['values', { values: new Float64Array(11) }],
    ['values[0]', { values: f(Number.NaN, 2, 3, 4, 5, 6, 7, 9) }],
    ['permutation', { permutation: i(0, 1) }],
    ['permutation[1]', { permutation: i(7, 7, 5, 4, 3, 2, 1, 0) }],
    ['permutation[0]', { permutation: i(8, 6, 5, 4, 3, 2, 1, 0) }],
    ['iterations', { iterations: 0 }],
  ])('surrogate: %s %o', (field, bad) => {
    for (const kernels of backends) expect(kernels.surrogate(surrogate).values.length).toBe(8);
    refuses(field, (kernels) => kernels.surrogate({ ...surrogate, ...bad }));
  });
});

describe('closing', () => {
  const closed = expect.objectContaining({ code: 'CLOSED' });

  test.each(['wasm-simd', 'wasm-scalar', 'js'] as const)('%s', async (backend) => {
    const kernels = await openKernels({ backend });
    const index = kernels.neighbourIndex(vectors, 'maximum');
    const other = kernels.neighbourIndex(vectors, 'maximum');
    index.close();
    index.close();
    expect(() => index.nearest(i(0), 1, 0)).toThrow(closed);
    expect(() => index.withinOf({ coordinates: f(0, 0, 0) }, 1, 0)).toThrow(closed);
    expect(other.nearest(i(0), 1, 0).k).toBe(1);
    kernels.close();
    kernels.close();
    expect(() => other.nearest(i(0), 1, 0)).toThrow(closed);
    expect(() => kernels.packDelayVectors(vectors)).toThrow(closed);
    expect(() => kernels.memory()).toThrow(closed);
    expect(() => kernels.realSpectrum(f(0, 1))).toThrow(closed);
    other.close();
  });
});
