import { writeFileSync } from 'node:fs';
import { join } from 'node:path';
import { expect, it } from 'vitest';
import { openCompute } from '../geometry/compute.ts';
import { ALL_GENERATORS, callOf, type PanelCall } from './tally.ts';

const SEEDS = Number(process.env.PANEL_SEEDS ?? 2);
const SAMPLES = (process.env.PANEL_SAMPLES ?? '2000').split(',').map(Number);
const CALLS = ['chaotic', 'periodic', 'quasiperiodic', 'noise', 'inconclusive'] as const;

/** 95 % upper limit of a share with `k` of `n` (Clopper & Pearson 1934), by bisection on the binomial sum. */
function upperLimit(k: number, n: number): number {
  const below = (p: number) => {
    let term = (1 - p) ** n;
    let sum = term;
    for (let i = 1; i <= k; i++) {
      term *= ((n - i + 1) / i) * (p / (1 - p));
      sum += term;
    }
    return sum;
  };
  let [low, high] = [k / n, 1];
  for (let i = 0; i < 60; i++) {
    const middle = (low + high) / 2;
    if (below(middle) > 0.05) low = middle;
    else high = middle;
  }
  return high;
}

it('regime panel', async () => {
  const compute = await openCompute();
  const calls: (PanelCall & { readonly samples: number })[] = [];
  for (const samples of SAMPLES)
    for (let seed = 1; seed <= SEEDS; seed++)
      for (const generator of ALL_GENERATORS)
        calls.push({ ...(await callOf(generator, samples, seed, compute)), samples });

  const row = (name: string, group: readonly PanelCall[]) =>
    `| ${name} | ${group.length} | ${CALLS.map((call) => group.filter((c) => c.call === call).length).join(' | ')} | ${group.filter((c) => c.verdict === 'wrong').length} |`;
  const head = `| records | in all | ${CALLS.join(' | ')} | wrong |\n| --- | --- | ${CALLS.map(() => '---').join(' | ')} | --- |`;
  const groups = ['noise', 'regular', 'chaos', 'other'] as const;
  const never = calls.filter((c) => c.group === 'noise' || c.group === 'regular');
  const falseChaos = never.filter((c) => c.call === 'chaotic').length;
  const text = [
    '# Regime panel: last results',
    '',
    `\`npm run panel\`: every generator of generators.ts, ${SEEDS} seeds, ${SAMPLES.join(', ')} samples, default options. Invented data; no threshold was set on these seeds one by one.`,
    '',
    head,
    ...groups.map((group) =>
      row(
        group,
        calls.filter((c) => c.group === group),
      ),
    ),
    '',
    `False chaos: ${falseChaos} of ${never.length} noise or regular records (95 % upper limit ${(100 * upperLimit(falseChaos, never.length)).toFixed(1)} %; errors cluster by generator, so the true limit is wider).`,
    '',
    '## By generator',
    '',
    head,
    ...ALL_GENERATORS.map((g) =>
      row(
        g.name,
        calls.filter((c) => c.generator === g.name),
      ),
    ),
    '',
  ].join('\n');
  writeFileSync(join(import.meta.dirname, 'RESULTS.md'), text);
  expect(calls.length).toBe(SEEDS * SAMPLES.length * ALL_GENERATORS.length);
});
