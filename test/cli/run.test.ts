import { mkdtempSync, readdirSync, readFileSync, rmSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { afterAll, describe, expect, it } from 'vitest';
import { run } from '../../src/cli/run.ts';

const folder = mkdtempSync(join(tmpdir(), 'leadspan-cli-'));
afterAll(() => rmSync(folder, { recursive: true }));

let files = 0;
function csv(content: string): string {
  const path = join(folder, `record-${files++}.csv`);
  writeFileSync(path, content);
  return path;
}
const table = (values: readonly (number | string)[]) =>
  csv(`time [s],x [K]\n${values.map((v, i) => `${i},${v}`).join('\n')}\n`);

async function leadspan(...argv: string[]) {
  return watched(new AbortController(), argv);
}

async function watched(controller: AbortController, argv: readonly string[]) {
  let out = '';
  let err = '';
  const status = await run(argv, {
    out: (text) => {
      out += text;
    },
    err: (text) => {
      err += text;
    },
    errIsTerminal: false,
    width: 100,
    interrupt: controller.signal,
  });
  return { status, out, err };
}

const tone = Array.from({ length: 600 }, (_, t) => Number(Math.sin(t / 3).toFixed(4)));

describe('answers', () => {
  it('prints a table with units and exits with 0 when answered', async () => {
    const { status, out, err } = await leadspan('assess', table(tone), '--threads', '0');
    expect(out).toMatch(/Regime +regular/);
    expect(out).toMatch(/Lead time +at least [\d.]+ s/);
    expect(out).not.toMatch(/NaN|Infinity|undefined|null|\[object/);
    expect(err).toBe('');
    expect(status).toBe(0);
  });

  it('exits with 1 when the regime is inconclusive', async () => {
    const { status, out } = await leadspan('assess', table(new Array(500).fill(3)), '--threads', '0');
    expect(out).toMatch(/CONSTANT/);
    expect(status).toBe(1);
  });

  it('prints JSON instead with --json -, and writes files whole', async () => {
    const path = join(folder, 'out.json');
    const record = table(tone);
    const printed = await leadspan('assess', record, '--threads', '0', '--json', '-');
    const written = await leadspan(
      'assess',
      record,
      '--threads',
      '0',
      '--json',
      path,
      '--report',
      join(folder, 'out.html'),
    );
    const strip = (text: string) => JSON.stringify({ ...JSON.parse(text), provenance: null });
    expect(strip(readFileSync(path, 'utf8'))).toBe(strip(printed.out));
    expect(written.status).toBe(0);
    expect(readFileSync(join(folder, 'out.html'), 'utf8')).toMatch(/^<!doctype html>[\s\S]*<\/html>\n$/);
  });

  it('computes a spectrum by name', async () => {
    const { status, out } = await leadspan('spectrum', 'henon', '--duration', '20000', '--threads', '0');
    expect(out).toMatch(/Lyapunov exponents, per step/);
    expect(out).toMatch(/agrees/);
    expect(status).toBe(0);
  });

  it('writes a demo record as CSV that it reads again', async () => {
    const path = join(folder, 'gears.csv');
    expect((await leadspan('demo', '--record', 'gears', '--csv', path)).status).toBe(0);
    expect(readFileSync(path, 'utf8').split('\n').length).toBe(12_002);
  });
});

describe('awkward records', () => {
  it.each([
    ['200 samples', tone.slice(0, 200)],
    ['gaps', tone.map((v, i) => (i % 50 === 7 ? '' : v))],
    ['a stuck sensor', tone.map((v, i) => (i > 200 ? 0.5 : v))],
    ['a clipped sensor', tone.map((v) => Math.max(-0.4, Math.min(0.4, v)))],
    ['values near 1e308', tone.map((v) => `${v}e308`)],
  ])('%s: an answer or a refusal, never a crash', async (_name, values) => {
    const { status, out, err } = await leadspan('assess', table(values), '--threads', '0');
    expect([0, 1]).toContain(status);
    expect(out).not.toMatch(/\bNaN\b(?!\))|Infinity|undefined|\[object/);
    expect(err).toBe('');
  });
});

it('one sample is refused', async () => {
  const { status, out } = await leadspan('assess', csv('x\n1\n'), '--interval', '1', '--threads', '0');
  expect(out).toMatch(/TOO_SHORT/);
  expect(status).toBe(1);
});

describe('misuse exits with 2 and says what is wrong', () => {
  it.each([
    [['asess', 'x.csv'], /no command "asess"; did you mean assess\?/],
    [['assess'], /takes one FILE/],
    [['assess', '/nowhere/x.csv'], /cannot be read/],
    [['assess', 'FILE', '--tolerence', '1'], /did you mean --tolerance\?/],
    [['assess', 'FILE', '--tolerance=-1'], /tolerance.*above 0.*got -1/],
    [['assess', 'FILE', '--confidence', '2'], /confidence.*got 2/],
    [
      ['assess', 'FILE', '--column', 'pressure'],
      /no column "pressure".*columns are: 1 "time \[s\]", 2 "x \[K\]"/,
    ],
    [['assess', 'FILE', '--report', '/nowhere/r.html'], /--report.*does not exist/],
    [['assess', 'FILE', '--threads', 'many'], /--threads must be a number/],
    [['spectrum', 'lorentz'], /no reference model "lorentz"; did you mean "lorenz"\?/],
    [['demo', '--record', 'lop'], /--record must be one of loop, deck, gears/],
  ])('%j', async (argv, message) => {
    const { status, out, err } = await leadspan(
      ...argv.map((word) => (word === 'FILE' ? table(tone) : word)),
    );
    expect(err).toMatch(message);
    expect(out).toBe('');
    expect(status).toBe(2);
  });

  it.each([
    ['text in the column', 'time,x\n0,1\n1,abc\n', /data row 2.*got "abc"/],
    ['infinity', 'time,x\n0,1\n1,inf\n', /finite/],
    ['unsorted times', `time,x\n${tone.map((v, i) => `${i === 5 ? 99 : i},${v}`).join('\n')}\n`, /times/],
    ['jittered times', `time,x\n${tone.map((v, i) => `${i + (i % 2) * 0.3},${v}`).join('\n')}\n`, /resample/],
    ['an empty file', '', /empty/],
  ])('%s', async (_name, content, message) => {
    const { status, err } = await leadspan('assess', csv(content), '--threads', '0');
    expect(err).toMatch(message);
    expect(status).toBe(2);
  });
});

describe('an interrupt', () => {
  it('exits with 130 and leaves no output files, whole or in part', async () => {
    const place = mkdtempSync(join(folder, 'interrupted-'));
    const record = table(Array.from({ length: 6000 }, (_, t) => Math.sin(t * t * 0.001)));
    const controller = new AbortController();
    setTimeout(() => controller.abort(), 200);
    const { status, err } = await watched(controller, [
      'assess',
      record,
      '--threads',
      '0',
      '--json',
      join(place, 'o.json'),
      '--report',
      join(place, 'o.html'),
    ]);
    expect(err).toMatch(/Interrupted/);
    expect(status).toBe(130);
    expect(readdirSync(place)).toEqual([]);
  });
});

it('help and version', async () => {
  expect((await leadspan('--help')).out).toMatch(/leadspan assess FILE/);
  expect((await leadspan('assess', '--help')).out).toMatch(/--tolerance SIZE/);
  expect((await leadspan('--version')).out).toMatch(/^\d+\.\d+\.\d+\n$/);
  expect((await leadspan()).status).toBe(2);
});
