import { delayVectors, lorenzSeries, scrambled } from './data.mjs';

/**
 * The kernels' workloads. `prepare(kernels)` gives the function to time; its result is compared between
 * variants bit for bit before anything is timed. `scale` makes the work smaller for a quick run.
 */
export function kernelWorkloads(scale) {
  const size = (n) => Math.round(n * scale);
  const all = (n) => Int32Array.from({ length: n }, (_, i) => i);
  return [
    {
      name: 'packing',
      work: `${size(100_000)} delay vectors, m = 8`,
      prepare: (kernels) => {
        const vectors = delayVectors(lorenzSeries(size(100_000)), 8, 16);
        return () => kernels.packDelayVectors(vectors);
      },
    },
    ...[
      ['neighbours', 5, 'euclidean'],
      ['neighbours-m8-maximum', 8, 'maximum'],
    ].map(([name, m, metric]) => ({
      name,
      work: `${size(100_000)} delay vectors, m = ${m}, ${metric} norm, 10 nearest of every point, |i − j| > 100: build and query`,
      prepare: (kernels) => {
        const vectors = delayVectors(lorenzSeries(size(100_000)), m, 16);
        const queries = all(vectors.starts.length);
        return () => {
          const index = kernels.neighbourIndex(vectors, metric);
          const result = index.nearest(queries, 10, 100);
          index.close();
          return result;
        };
      },
    })),
    {
      name: 'pairs',
      work: `${size(20_000)} samples, m = 1 … 10 in one pass, maximum norm, 64 radii, all pairs with |i − j| > 100`,
      prepare: (kernels) => {
        const input = correlationInput(size(20_000));
        return () => kernels.correlationCounts(input);
      },
    },
    {
      name: 'pairs-references',
      work: `${size(100_000)} samples against ${size(2000)} reference points, m = 1 … 10`,
      prepare: (kernels) => {
        const input = correlationInput(size(100_000));
        const references = scrambled(input.valid.length).slice(0, size(2000)).sort();
        return () => kernels.correlationCountsFrom(input, references);
      },
    },
    {
      name: 'false-neighbours',
      work: `${size(100_000)} pairs`,
      prepare: (kernels) => {
        const series = lorenzSeries(size(100_000));
        const vectors = delayVectors(series, 4, 16);
        const usable = { ...vectors, starts: vectors.starts.filter((s) => s - 64 >= 0) };
        const index = kernels.neighbourIndex(usable, 'euclidean');
        const { indices, distances } = index.nearest(all(usable.starts.length), 1, 100);
        index.close();
        const input = {
          vectors: usable,
          neighbours: indices,
          distances,
          nextOffset: -64,
          threshold: 10,
          judgeableDistance: 1,
        };
        return () => kernels.falseNeighbourCounts(input);
      },
    },
    {
      name: 'mutual-information',
      work: `${size(100_000)} samples, 32 bins, 100 lags`,
      prepare: (kernels) => {
        const series = lorenzSeries(size(100_000));
        const symbols = Uint8Array.from(series, (x) => Math.min(31, Math.max(0, Math.floor((x + 20) * 0.8))));
        const input = { symbols, bins: 32, lags: all(100) };
        return () => kernels.jointCounts(input);
      },
    },
    {
      name: 'divergence',
      work: `${size(50_000)} delay vectors, m = 5: nearest neighbour of each, mean log distance followed 500 steps`,
      prepare: (kernels) => {
        const steps = 500;
        const series = lorenzSeries(size(50_000));
        const vectors = delayVectors(series, 5, 16);
        const queries = all(vectors.starts.length);
        return () => {
          const index = kernels.neighbourIndex(vectors, 'euclidean');
          const { indices } = index.nearest(queries, 1, 100);
          index.close();
          const first = vectors.starts;
          const second = Int32Array.from(indices, (j) => vectors.starts[j]);
          const lengths = first.map((s, i) => Math.min(steps, series.length - 1 - Math.max(s, second[i])));
          return kernels.divergenceSums({
            data: series,
            first,
            second,
            lengths,
            offsets: Int32Array.of(0),
            steps,
            blockStarts: Int32Array.of(0, first.length),
          });
        };
      },
    },
    {
      name: 'neighbourhood-divergence',
      work: `${size(4000)} reference points with 20 neighbours each, followed 200 steps`,
      prepare: (kernels) => {
        const steps = 200;
        const series = lorenzSeries(size(50_000));
        const vectors = delayVectors(series, 5, 16);
        const usable = { ...vectors, starts: vectors.starts.filter((s) => s + steps < series.length) };
        const queries = scrambled(usable.starts.length).slice(0, size(4000)).sort();
        const index = kernels.neighbourIndex(usable, 'euclidean');
        const { indices } = index.nearest(queries, 20, 100);
        index.close();
        const input = {
          data: series,
          references: Int32Array.from(queries, (q) => usable.starts[q]),
          rowStarts: Int32Array.from({ length: queries.length + 1 }, (_, i) => i * 20),
          neighbours: Int32Array.from(indices, (j) => usable.starts[j]),
          lengths: new Int32Array(indices.length).fill(steps),
          steps,
          blockStarts: Int32Array.of(0, queries.length),
        };
        return () => kernels.neighbourhoodDivergence(input);
      },
    },
    {
      name: 'local-fits',
      work: `${size(2000)} local linear maps, m = 6, 40 neighbours, 50 leads each`,
      prepare: (kernels) => {
        const leads = 50;
        const series = lorenzSeries(size(20_000));
        const vectors = delayVectors(series, 6, 16);
        const usable = { ...vectors, starts: vectors.starts.filter((s) => s + leads < series.length) };
        const queries = scrambled(usable.starts.length).slice(0, size(2000)).sort();
        const index = kernels.neighbourIndex(usable, 'euclidean');
        const neighbours = index.nearest(queries, 40, 100);
        index.close();
        const coordinates = new Float64Array(queries.length * 6);
        queries.forEach((q, i) => {
          for (let d = 0; d < 6; d++) coordinates[i * 6 + d] = series[usable.starts[q] - d * 16];
        });
        const input = {
          vectors: usable,
          targetOffsets: Int32Array.from({ length: leads }, (_, h) => h + 1),
          queries: coordinates,
          neighbours,
          order: 1,
          weights: 'tricube',
          ridge: 1e-6,
        };
        return () => kernels.localFits(input);
      },
    },
    {
      name: 'orthonormalise',
      work: '40 × 40 matrix, 50 times',
      prepare: (kernels) => {
        const matrix = lorenzSeries(1600);
        return () => {
          let result;
          for (let i = 0; i < 50; i++) result = kernels.orthonormalise(matrix, 40, 40);
          return result;
        };
      },
    },
    {
      name: 'tangent-lorenz',
      work: `Lorenz system with 3 tangents, ${size(100_000)} Runge–Kutta steps of 0.01, Gram–Schmidt every 10`,
      prepare: (kernels) => {
        const input = {
          field: 'lorenz',
          parameters: Float64Array.of(10, 28, 8 / 3),
          state: Float64Array.of(1, 1, 20),
          tangents: Float64Array.of(1, 0, 0, 0, 1, 0, 0, 0, 1),
          tangentCount: 3,
          step: 0.01,
          stepsPerBlock: 10,
          blocks: size(10_000),
        };
        return () => kernels.advanceFlow(input);
      },
    },
    {
      name: 'tangent-lorenz-96',
      work: `Lorenz-96, 40 variables, 40 tangents, ${size(2000)} steps`,
      prepare: (kernels) => {
        const tangents = new Float64Array(1600);
        for (let i = 0; i < 40; i++) tangents[i * 41] = 1;
        const input = {
          field: 'lorenz-96',
          parameters: Float64Array.of(8),
          state: Float64Array.from({ length: 40 }, (_, i) => 8 + (i === 19 ? 0.01 : 0)),
          tangents,
          tangentCount: 40,
          step: 0.01,
          stepsPerBlock: 10,
          blocks: size(200),
        };
        return () => kernels.advanceFlow(input);
      },
    },
    {
      name: 'fourier',
      work: '65,536 samples, real transform',
      prepare: (kernels) => {
        const series = lorenzSeries(65_536);
        return () => kernels.realSpectrum(series);
      },
    },
    {
      name: 'surrogate',
      work: '65,536 samples, iterative amplitude-adjusted surrogate, at most 20 iterations',
      prepare: (kernels) => {
        const values = lorenzSeries(65_536);
        const input = { values, permutation: scrambled(65_536), iterations: 20 };
        return () => kernels.surrogate(input);
      },
    },
  ];
}

function correlationInput(count) {
  const series = lorenzSeries(count);
  const dimensions = 10;
  const delay = 16;
  return {
    series,
    valid: new Uint8Array(count - (dimensions - 1) * delay).fill(1),
    delay,
    dimensions,
    exclusion: 100,
    smallestExponent: -10,
  };
}
