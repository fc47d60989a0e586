import { readFileSync } from 'node:fs';
import { fileURLToPath } from 'node:url';
import { defineConfig } from 'vitest/config';
import { deflatedWasm } from './tsup.config.ts';

/**
 * Sources import the built kernels and the built worker as modules (see "Build" in DEVELOPERS.md).
 * tsup inlines them with esbuild loaders; this plugin does the same for tests that run on `src`.
 */
const inlineBuiltParts = {
  name: 'inline-built-parts',
  enforce: 'pre' as const,
  load(id: string) {
    if (id.endsWith('.wasm')) {
      const base64 = Buffer.from(deflatedWasm(id)).toString('base64');
      return `export default Uint8Array.from(atob(${JSON.stringify(base64)}), (c) => c.charCodeAt(0));`;
    }
    if (id.endsWith('.worker.txt')) return `export default ${JSON.stringify(readFileSync(id, 'utf8'))};`;
    return undefined;
  },
};

export default defineConfig({
  plugins: [inlineBuiltParts],
  test: {
    include: ['test/**/*.test.ts'],
    exclude: ['test/panel/full/**', 'node_modules/**'],
    root: fileURLToPath(new URL('.', import.meta.url)),
    // A hang is found; a loaded machine is not a failure.
    testTimeout: 240_000,
    hookTimeout: 240_000,
    // Two cores: more processes only make the worker-pool tests wait for each other.
    maxWorkers: 2,
  },
});
