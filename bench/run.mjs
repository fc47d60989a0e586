/**
 * npm run bench [-- --json FILE] [--only WORKLOAD] [--rounds N] [--scale S]
 *
 * Speed of the wasm kernels against the plain-JavaScript fallback, and of whole assessments, on the built
 * package. Absolute times are for orientation; the ratios, taken in one run, are what counts.
 */
import { writeFileSync } from 'node:fs';
import { parseArgs } from 'node:util';
import { createEngine } from '../dist/index.js';
import { openKernels } from '../dist/kernels.js';
import { lorenzSeries } from './data.mjs';
import { alternate, digest, median, row } from './measure.mjs';
import { kernelWorkloads } from './workloads.mjs';

const { values } = parseArgs({
  options: {
    json: { type: 'string' },
    only: { type: 'string' },
    rounds: { type: 'string', default: '5' },
    scale: { type: 'string', default: '0.2' },
  },
});
const rounds = Number(values.rounds);
const scale = Number(values.scale);
const rows = [];
const print = (r, work) => {
  const ops = 1000 / r.medianMs;
  console.log(
    `${r.workload.padEnd(26)} ${r.variant.padEnd(12)} ${r.medianMs.toFixed(2).padStart(10)} ms ${ops.toFixed(1).padStart(9)} op/s  ±${(r.spread * 100).toFixed(0).padStart(3)} %  ${r.ratioToFallback === null ? '' : `${r.ratioToFallback.toFixed(2)}×`.padStart(8)}  ${r.agrees ? 'same bits' : 'DIFFERS'}${work ? `   ${work}` : ''}`,
  );
};

const variants = { 'wasm-simd': 'wasm-simd', 'wasm-scalar': 'wasm-scalar', fallback: 'js' };
console.log(`Kernels (scale ${scale} of the full workload, ${rounds} rounds in alternation)\n`);
for (const workload of kernelWorkloads(scale)) {
  if (values.only && workload.name !== values.only) continue;
  const opened = {};
  for (const [name, backend] of Object.entries(variants)) opened[name] = await openKernels({ backend });
  const runs = Object.fromEntries(
    Object.entries(opened).map(([name, kernels]) => [name, workload.prepare(kernels)]),
  );
  const digests = Object.fromEntries(Object.entries(runs).map(([name, run]) => [name, digest(run())]));
  const times = alternate(runs, rounds, 0.3);
  for (const name of Object.keys(variants)) {
    const r = row(workload.name, name, times[name], times.fallback, digests[name] === digests.fallback);
    rows.push(r);
    print(r, name === 'wasm-simd' ? workload.work : '');
  }
  for (const kernels of Object.values(opened)) kernels.close();
}

if (!values.only || values.only.startsWith('assess')) await assessments();
if (values.json) writeFileSync(values.json, `${JSON.stringify(rows, null, 2)}\n`);

async function assessments() {
  console.log('\nWhole assessments, Lorenz x at 0.05 apart, 39 surrogates\n');
  const engines = {
    'wasm-simd, 2 threads': await createEngine({ backend: 'wasm-simd', threads: 2 }),
    'wasm-simd, 1 thread': await createEngine({ backend: 'wasm-simd', threads: 1 }),
    fallback: await createEngine({ backend: 'js', threads: 2 }),
  };
  const dense = lorenzSeries(250_000);
  const thinned = dense.filter((_, i) => i % 5 === 0);
  const medians = {};
  for (const count of [2000, 10_000, 50_000]) {
    const samples = thinned.slice(0, count);
    const times = Object.fromEntries(Object.keys(engines).map((name) => [name, []]));
    const bits = {};
    for (let round = 0; round < Math.min(rounds, 3); round++)
      for (const [name, engine] of Object.entries(engines)) {
        const start = performance.now();
        const { provenance, ...rest } = await engine.assess({ samples, interval: 0.05 });
        times[name].push(performance.now() - start);
        bits[name] = digest(rest);
      }
    for (const name of Object.keys(engines)) {
      const r = row(`assess-${count}`, name, times[name], times.fallback, bits[name] === bits.fallback);
      rows.push(r);
      print(r, '');
    }
    medians[count] = median(times['wasm-simd, 2 threads']);
  }
  const growth = Math.log(medians[50_000] / medians[10_000]) / Math.log(5);
  console.log(`\nGrowth from 10,000 to 50,000 samples: N^${growth.toFixed(2)}`);
  console.log(
    `Peak resident memory of this process: ${(process.resourceUsage().maxRSS / 1024).toFixed(0)} MB`,
  );
  for (const engine of Object.values(engines)) await engine.close();
}
