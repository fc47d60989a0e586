import { defineConfig, type Options } from 'tsup';

const shared: Options = {
  target: 'es2022',
  platform: 'neutral',
  removeNodeProtocol: false,
  loader: { '.wasm': 'binary', '.txt': 'text' },
  clean: false,
  splitting: false,
  treeshake: true,
  sourcemap: false,
};

/** `npm run build` calls tsup twice: first the worker, which the second pass inlines as text. */
export default defineConfig((options) =>
  options.env?.PART === 'worker'
    ? [
        {
          ...shared,
          entry: { 'leadspan.worker': 'src/engine/worker.ts' },
          format: ['iife'],
          minify: true,
          outDir: 'dist/worker',
          outExtension: () => ({ js: '.txt' }),
        },
      ]
    : [
        {
          ...shared,
          entry: {
            index: 'src/index.ts',
            kernels: 'src/kernels.ts',
            figures: 'src/figures/index.ts',
            report: 'src/report/index.ts',
          },
          format: ['esm', 'cjs'],
          dts: true,
          outDir: 'dist',
        },
        {
          ...shared,
          entry: { node: 'src/node/index.ts' },
          format: ['esm', 'cjs'],
          platform: 'node',
          dts: true,
          outDir: 'dist',
        },
        {
          ...shared,
          entry: { cli: 'src/cli/main.ts' },
          format: ['esm'],
          platform: 'node',
          outDir: 'dist',
          banner: { js: '#!/usr/bin/env node' },
        },
      ],
);
