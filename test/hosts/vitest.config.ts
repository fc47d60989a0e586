import { defineConfig } from 'vitest/config';

/** `npm run hosts`: the packed tarball in real hosts. Needs Chromium; `.ci/run` installs it. */
export default defineConfig({
  test: {
    include: ['test/hosts/**/*.hosts.ts'],
    globalSetup: ['test/hosts/setup.ts'],
    testTimeout: 180_000,
    hookTimeout: 300_000,
    fileParallelism: false,
  },
});
