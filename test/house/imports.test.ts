import { readdirSync, readFileSync } from 'node:fs';
import { dirname, join, relative, resolve } from 'node:path';
import { describe, expect, it } from 'vitest';

/**
 * Arrows of the house (DEVELOPERS.md › Folders): a folder may import from folders of a lower level, and
 * from the folders of its own level named here. `fallback` needs only `base`.
 */
const LEVELS: Readonly<Record<string, { readonly level: number; readonly beside?: readonly string[] }>> = {
  base: { level: 0 },
  fallback: { level: 1 },
  core: { level: 2 },
  recording: { level: 3 },
  reconstruct: { level: 4, beside: [] },
  model: { level: 4, beside: [] },
  geometry: { level: 5, beside: [] },
  divergence: { level: 5, beside: ['geometry'] },
  forecast: { level: 6, beside: [] },
  evidence: { level: 7, beside: [] },
  assess: { level: 8 },
  engine: { level: 9 },
  figures: { level: 9 },
  report: { level: 10 },
  node: { level: 10 },
  cli: { level: 11 },
};
/** `recording/stationarity` forecasts, so it reads delay vectors: the one arrow up, from file to file. */
const ALLOWED_UP = new Set(['recording/stationarity.ts → reconstruct']);

const root = resolve(import.meta.dirname, '../../src');
const files = (readdirSync(root, { recursive: true }) as string[]).filter(
  (f) => f.endsWith('.ts') && !f.endsWith('.d.ts'),
);

const imports = files.flatMap((file) => {
  const text = readFileSync(join(root, file), 'utf8');
  const statements = /^(?:import|export)[^;]*? from '([^']+)'|\bimport\('([^']+)'\)/gm;
  return [...text.matchAll(statements)].map(([, a, b]) => ({ file, target: (a ?? b)! }));
});
const folderOf = (path: string) => (path.includes('/') ? path.split('/')[0]! : '');
const local = imports
  .filter(({ target }) => target.startsWith('.') && target.endsWith('.ts'))
  .map(({ file, target }) => ({ file, to: relative(root, resolve(root, dirname(file), target)) }));

describe('import directions', () => {
  it('sees the sources', () => {
    expect(files.length).toBeGreaterThan(50);
    expect(local.length).toBeGreaterThan(100);
  });

  it('points down the levels only', () => {
    const wrong = local.filter(({ file, to }) => {
      const from = folderOf(file);
      const target = folderOf(to);
      if (from === '' || from === target) return false;
      if (ALLOWED_UP.has(`${file} → ${target}`)) return false;
      const [a, b] = [LEVELS[from], LEVELS[target]];
      if (!a || !b) return true;
      return !(b.level < a.level || (b.level === a.level && a.beside?.includes(target)));
    });
    expect(wrong).toEqual([]);
  });

  it('has no circle', () => {
    const next = new Map<string, string[]>();
    for (const { file, to } of local) next.set(file, [...(next.get(file) ?? []), to]);
    const state = new Map<string, 'open' | 'done'>();
    const circles: string[] = [];
    const visit = (file: string, path: readonly string[]): void => {
      if (state.get(file) === 'done') return;
      if (state.get(file) === 'open') {
        circles.push([...path.slice(path.indexOf(file)), file].join(' → '));
        return;
      }
      state.set(file, 'open');
      for (const to of next.get(file) ?? []) visit(to, [...path, file]);
      state.set(file, 'done');
    };
    for (const file of files) visit(file, []);
    expect(circles).toEqual([]);
  });

  it('keeps Node and packages out of everything but the edges', () => {
    const outside = imports.filter(
      ({ file, target }) => !target.startsWith('.') && !/^(node|cli|report)\//.test(file),
    );
    expect(outside).toEqual([]);
  });

  it('knows the kernel ABI in src/core only', () => {
    const wasm = imports.filter(({ file, target }) => target.endsWith('.wasm') && !file.startsWith('core/'));
    expect(wasm).toEqual([]);
  });
});

describe('same bits everywhere', () => {
  it('takes elementary functions from base/elementary.ts, not from the host', () => {
    const inexact =
      /Math\.(log|exp|pow|sin|cos|tan|hypot|log2|log10|log1p|expm1|cbrt|asin|acos|atan|atan2|sinh|cosh|tanh|random)\b|\*\*(?!\s*-?\d)/;
    const wrong = files
      .filter((file) =>
        /^(base|fallback|core|recording|reconstruct|model|geometry|divergence|forecast|evidence|assess)\//.test(
          file,
        ),
      )
      .flatMap((file) =>
        readFileSync(join(root, file), 'utf8')
          .replace(/\/\*[\s\S]*?\*\/|\/\/.*/g, (comment) => comment.replace(/[^\n]/g, ''))
          .split('\n')
          .map((line, i) => ({ at: `${file}:${i + 1}`, line: line.trim() }))
          .filter(({ line }) => inexact.test(line)),
      );
    expect(wrong).toEqual([]);
  });
});
