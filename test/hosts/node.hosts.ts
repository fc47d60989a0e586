import { execFileSync, spawnSync } from 'node:child_process';
import { cpSync, mkdirSync, writeFileSync } from 'node:fs';
import { join, resolve } from 'node:path';
import { beforeAll, describe, expect, inject, it } from 'vitest';

const scratch = inject('scratch');
const root = resolve(import.meta.dirname, '../..');

/** An empty project with the tarball installed. */
function project(name: string, manifest: Record<string, unknown>, files: Record<string, string>): string {
  const folder = join(scratch, name);
  mkdirSync(folder);
  writeFileSync(
    join(folder, 'package.json'),
    JSON.stringify({ name, version: '1.0.0', private: true, ...manifest }),
  );
  for (const [file, text] of Object.entries(files)) writeFileSync(join(folder, file), text);
  cpSync(join(import.meta.dirname, 'record.mjs'), join(folder, 'record.mjs'));
  execFileSync('npm', ['install', '--no-audit', '--no-fund', inject('tarball')], {
    cwd: folder,
    stdio: 'pipe',
  });
  return folder;
}

const run = (folder: string, ...args: string[]) =>
  execFileSync(process.execPath, args, { cwd: folder, encoding: 'utf8' });

const USE = `
  const engine = await createEngine({ threads: 1 });
  const assessment = await engine.assess(hostRecord(), { signal: new AbortController().signal });
  const kernels = await openKernels();
  const { logNorms } = kernels.orthonormalise(Float64Array.of(3, 0, 4, 5), 2, 2);
  console.log(JSON.stringify({
    schema: assessment.schema, backend: engine.info.backend, threads: engine.info.threads,
    call: assessment.regime.call, norm: Math.exp(logNorms[0]), figure: recordFigure(assessment).width, error: new LeadspanError('CLOSED', 'x').code,
  }));
  await engine.close();
  kernels.close();
`;
const EXPECTED = {
  schema: 'leadspan.assessment/1',
  backend: 'wasm-simd',
  threads: 1,
  figure: 560,
  error: 'CLOSED',
};

describe('an ES module project', () => {
  let folder: string;
  beforeAll(() => {
    folder = project(
      'esm',
      { type: 'module' },
      {
        'main.js': `
import { createEngine, LeadspanError } from 'leadspan';
import { openKernels } from 'leadspan/kernels';
import { recordFigure } from 'leadspan/figures';
import { hostRecord } from './record.mjs';
${USE}`,
      },
    );
  });

  it('runs an assessment in a worker', () => {
    const result = JSON.parse(run(folder, 'main.js'));
    expect(result).toMatchObject(EXPECTED);
    expect(result.norm).toBeCloseTo(5, 12); // ‖(3, 4)‖ = 5, exact
  });

  it('runs the command', () => {
    const bin = join(folder, 'node_modules/.bin/leadspan');
    const rows = Array.from({ length: 600 }, (_, i) => `${i},${Math.sin(i / 5)}`).join('\n');
    const done = spawnSync(bin, ['assess', '-', '--json', '-'], {
      input: `time,x\n${rows}\n`,
      encoding: 'utf8',
    });
    expect(done.stderr).toBe('');
    expect(JSON.parse(done.stdout).schema).toBe('leadspan.assessment/1');
  });

  it('says what the report needs when the renderer is not installed', () => {
    const bin = join(folder, 'node_modules/.bin/leadspan');
    const done = spawnSync(bin, ['demo', '--record', 'gears', '--report', 'r.html'], {
      cwd: folder,
      encoding: 'utf8',
    });
    expect(done.status).toBe(3);
    expect(done.stderr).toMatch(/npm install vega vega-lite/);
  });
});

describe('a CommonJS project', () => {
  it('requires every entry', () => {
    const folder = project(
      'cjs',
      {},
      {
        'main.js': `
const { createEngine, LeadspanError } = require('leadspan');
const { openKernels } = require('leadspan/kernels');
const { recordFigure } = require('leadspan/figures');
const { renderReport } = require('leadspan/report');
const { readRecording } = require('leadspan/node');
(async () => {
  const { hostRecord } = await import('./record.mjs');
  if (typeof renderReport !== 'function' || typeof readRecording !== 'function') throw new Error('entry missing');
  ${USE}
})();`,
      },
    );
    expect(JSON.parse(run(folder, 'main.js'))).toMatchObject(EXPECTED);
  });
});

describe('a TypeScript NodeNext project without DOM or Node types', () => {
  it('compiles strictly with library checks on, and runs', () => {
    const folder = project(
      'nodenext',
      { type: 'module' },
      {
        'main.ts': `
import { createEngine, isLeadspanError, type Answer, type Assessment, type Recording } from 'leadspan';
import { openKernels, type Kernels } from 'leadspan/kernels';
import { errorGrowthFigure, type FigureSpec } from 'leadspan/figures';
declare const console: { log(text: string): void };
const recording: Recording = { samples: [1, 2, 3], interval: 1 };
const kernels: Kernels = await openKernels({ backend: 'js' });
const engine = await createEngine({ threads: 0, backend: 'js' });
const text = (answer: Answer): string => (answer.ok ? String(answer.value) : answer.code);
const assessment: Assessment = await engine.assess(recording);
const figure: FigureSpec | null = errorGrowthFigure(assessment);
try { await engine.assess({ samples: [1], interval: -1 }); } catch (e) { if (isLeadspanError(e)) console.log(text(assessment.leadTime.trusted) + ' ' + e.code + ' ' + (figure === null)); }
kernels.close();
await engine.close();
`,
        'tsconfig.json': JSON.stringify({
          compilerOptions: {
            module: 'NodeNext',
            target: 'ES2022',
            lib: ['ES2022'],
            types: [],
            strict: true,
            skipLibCheck: false,
          },
          files: ['main.ts'],
        }),
      },
    );
    const compiled = spawnSync(
      process.execPath,
      [join(root, 'node_modules/typescript/bin/tsc'), '-p', folder],
      { encoding: 'utf8' },
    );
    expect(compiled.stdout).toBe('');
    expect(run(folder, 'main.js').trim()).toBe('TOO_SHORT BAD_INPUT true');
  });
});
