import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import type { Assessment } from '../../src/assess/types.ts';
import { createRandom } from '../../src/base/random.ts';
import { createEngine, type Engine, type EngineOptions } from '../../src/engine/engine.ts';
import { referenceModel } from '../../src/model/reference.ts';
import { simulate } from '../../src/model/simulate.ts';

/** Everything but the backend's name and the times taken (ARCHITECTURE: both are outside the comparison). */
function bits({ provenance: { backend: _b, elapsed: _e, ...provenance }, ...rest }: Assessment): string {
  return JSON.stringify({ ...rest, provenance });
}

const hosts: Readonly<Record<string, EngineOptions>> = {
  'wasm SIMD, inline': { backend: 'wasm-simd', threads: 0 },
  'wasm SIMD, 1 thread': { backend: 'wasm-simd', threads: 1 },
  'wasm SIMD, 3 threads': { backend: 'wasm-simd', threads: 3 },
  'wasm scalar, 2 threads': { backend: 'wasm-scalar', threads: 2 },
  'plain JavaScript, 2 threads': { backend: 'js', threads: 2 },
};

const lorenz = simulate(referenceModel('lorenz'), { samples: 2500, interval: 0.05, transient: 50 });
const noise = createRandom(11);
const records = {
  'a flow': { samples: lorenz.x!, interval: 0.05 },
  'a flow with gaps, noise and two channels': {
    samples: [lorenz.x!, lorenz.z!].map((channel) =>
      channel.map((v, i) =>
        i % 700 === 350 || (i > 1200 && i < 1230) ? Number.NaN : v + 0.2 * noise.normal(),
      ),
    ),
    interval: 0.05,
    target: 1,
  },
  'white noise': { samples: Float64Array.from({ length: 1500 }, () => noise.normal()), interval: 1 },
} as const;

describe('whole assessments are equal bit for bit', () => {
  const engines: [string, Engine][] = [];
  beforeAll(async () => {
    for (const [name, options] of Object.entries(hosts)) engines.push([name, await createEngine(options)]);
  });
  afterAll(async () => {
    for (const [, engine] of engines) await engine.close();
  });

  it.each(Object.keys(records) as (keyof typeof records)[])('%s', async (name) => {
    const results: [string, string][] = [];
    for (const [host, engine] of engines) {
      const assessment = await engine.assess(records[name], { seed: 7 });
      results.push([host, bits(assessment)]);
    }
    const [, first] = results[0]!;
    expect(results.filter(([, text]) => text !== first).map(([host]) => host)).toEqual([]);
  });

  it('changes with the seed only in what is random', async () => {
    const [, engine] = engines[1]!;
    const [a, b] = await Promise.all([1, 2].map((seed) => engine.assess(records['a flow'], { seed })));
    expect(a!.provenance.inputHash).toBe(b!.provenance.inputHash);
    expect(a!.record.mean).toBe(b!.record.mean);
    expect(bits(a!)).not.toBe(bits(b!));
  });
});
