import { readFileSync } from 'node:fs';
import { deflateRawSync } from 'node:zlib';
import { defineConfig, type Options } from 'tsup';

/** The kernels travel deflated: base64 of raw wasm would no longer compress. `core/open.ts` inflates them. */
export const deflatedWasm = (file: string): Uint8Array => deflateRawSync(readFileSync(file), { level: 9 });

const inlineWasm: NonNullable<Options['esbuildPlugins']>[number] = {
  name: 'inline-wasm',
  setup(build) {
    build.onLoad({ filter: /\.wasm$/ }, ({ path }) => ({ contents: deflatedWasm(path), loader: 'binary' }));
  },
};

const shared: Options = {
  target: 'es2022',
  platform: 'neutral',
  removeNodeProtocol: false,
  loader: { '.txt': 'text' },
  esbuildPlugins: [inlineWasm],
  clean: false,
  splitting: false,
  treeshake: true,
  minify: true,
};

/** `npm run build` calls tsup twice: first the worker, which the second pass inlines as text. */
export default defineConfig((options) =>
  options.env?.PART === 'worker'
    ? [
        {
          ...shared,
          entry: { 'leadspan.worker': 'src/engine/worker.ts' },
          format: ['iife'],
          outDir: 'dist/worker',
          outExtension: () => ({ js: '.txt' }),
        },
      ]
    : [
        {
          ...shared,
          // Splitting keeps the worker's text and what the entries share in chunks of their own.
          splitting: true,
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
