import { compile } from 'vega-lite';
import { beforeAll, describe, expect, it } from 'vitest';
import { assess } from '../../src/assess/assess.ts';
import type { Assessment } from '../../src/assess/types.ts';
import * as figures from '../../src/figures/index.ts';
import { renderReport } from '../../src/report/index.ts';
import { openCompute } from '../geometry/compute.ts';

const hostile = '<script>alert(1)</script>"\'&';
let assessment: Assessment;
let page: string;
beforeAll(async () => {
  const samples = Float64Array.from({ length: 700 }, (_, t) => Math.sin(t / 3));
  assessment = await assess({ samples, interval: 1, name: hostile, unit: hostile }, {}, await openCompute(), {
    backend: 'wasm-simd',
    threads: 0,
  });
  page = await renderReport(assessment);
});

describe('the report', () => {
  it('escapes what comes from outside', () => {
    expect(page).not.toContain('<script');
    expect(page).toContain('&lt;script&gt;');
  });

  it('loads nothing from anywhere', () => {
    const links = [...page.matchAll(/(?:\s(?:src|href)=|url\(|@import )["']?([^"')\s>]+)/g)].map(
      ([, target]) => target!,
    );
    expect(links.filter((target) => !target.startsWith('#'))).toEqual([]);
    expect(page).toContain("default-src 'none'");
  });

  it('puts the answer first, then the questions in their order', () => {
    const places = [
      'class="plate"',
      'How far ahead?',
      'Rule or noise?',
      'What limits it?',
      'Was the record good enough?',
      'Cautions',
      'How each number was obtained',
    ].map((text) => page.indexOf(text));
    expect(places.every((place) => place > 0)).toBe(true);
    expect([...places].sort((a, b) => a - b)).toEqual(places);
  });

  it('gives every picture a text alternative and a caption', () => {
    const pictures = page.match(/<figure>/g)!.length;
    expect(page.match(/<svg role="img" aria-label="[^"]{20,}"/g)!.length).toBe(pictures);
    expect(page.match(/<figcaption>/g)!.length).toBe(pictures);
    expect(page).toContain('<html lang="en">');
  });

  it('shows no broken number', () => {
    expect(page.replace(/<svg[\s\S]*?<\/svg>/g, '')).not.toMatch(/NaN|Infinity|undefined|\[object/);
  });
});

describe('figures', () => {
  it('compile as Vega-Lite', () => {
    const specs = Object.entries(figures).filter(([name]) => name.endsWith('Figure'));
    expect(specs.length).toBe(9);
    for (const [name, make] of specs) {
      const spec = (make as (a: Assessment) => unknown)(assessment);
      if (spec !== null) expect(compile(spec as never).spec, name).toBeTruthy();
    }
  });

  it('are null where the record was left out', () => {
    expect(figures.recordFigure({ ...assessment, data: null })).toBeNull();
    expect(figures.portraitFigure({ ...assessment, data: null })).toBeNull();
  });
});
