import base from '../../vitest.config.ts';

/** `npm run panel`: minutes to hours; writes test/panel/RESULTS.md. PANEL_SEEDS and PANEL_SAMPLES change its size. */
export default {
  ...base,
  test: { ...base.test, include: ['test/panel/**/*.panel.ts'], testTimeout: 4 * 3_600_000 },
};
