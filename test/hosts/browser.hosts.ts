import { execFileSync } from 'node:child_process';
import { cpSync, existsSync, mkdirSync, readFileSync, writeFileSync } from 'node:fs';
import { createServer, type Server } from 'node:http';
import { extname, join, resolve } from 'node:path';
import { build as esbuild } from 'esbuild';
import { type Browser, chromium } from 'playwright-core';
import { build as vite } from 'vite';
import { afterAll, beforeAll, describe, expect, inject, it } from 'vitest';

const CHROMIUM = ['/usr/bin/chromium', '/usr/bin/chromium-browser', '/usr/bin/google-chrome'].find((path) =>
  existsSync(path),
);
const FLAGS = [
  '--no-sandbox',
  '--disable-gpu',
  '--disable-quic',
  '--no-first-run',
  '--disable-background-networking',
  '--disable-component-update',
  '--disable-sync',
];
const TYPES: Record<string, string> = {
  '.html': 'text/html',
  '.js': 'text/javascript',
  '.mjs': 'text/javascript',
  '.css': 'text/css',
};

const scratch = inject('scratch');
const folder = join(scratch, 'page');
let nodeBits: string;
let server: Server;
let origin: string;
/** Extra response headers of a run. */
let headers: Record<string, string> = {};

beforeAll(async () => {
  if (!CHROMIUM) throw new Error('Chromium is needed: on Debian, apt-get install chromium');
  mkdirSync(folder);
  cpSync(join(import.meta.dirname, 'page'), folder, { recursive: true });
  cpSync(join(import.meta.dirname, 'record.mjs'), join(folder, 'record.mjs'));
  writeFileSync(
    join(folder, 'package.json'),
    JSON.stringify({ name: 'page', version: '1.0.0', private: true, type: 'module' }),
  );
  execFileSync('npm', ['install', '--no-audit', '--no-fund', inject('tarball')], {
    cwd: folder,
    stdio: 'pipe',
  });

  await vite({
    root: folder,
    logLevel: 'error',
    base: './',
    build: { outDir: join(scratch, 'site/vite'), emptyOutDir: true, target: 'es2022' },
  });
  await esbuild({
    entryPoints: [join(folder, 'main.js')],
    bundle: true,
    format: 'esm',
    target: 'es2022',
    outfile: join(scratch, 'site/esbuild/main.js'),
    logLevel: 'error',
  });
  cpSync(join(folder, 'index.html'), join(scratch, 'site/esbuild/index.html'));

  writeFileSync(
    join(folder, 'node.js'),
    `import { createEngine } from 'leadspan'; import { comparable, hostRecord } from './record.mjs';
     const e = await createEngine({ threads: 0 }); process.stdout.write(comparable(await e.assess(hostRecord()))); await e.close();`,
  );
  nodeBits = execFileSync(process.execPath, ['node.js'], { cwd: folder, encoding: 'utf8' });

  const site = resolve(scratch, 'site');
  server = createServer((request, response) => {
    const path = resolve(site, `.${new URL(request.url!, 'http://x').pathname}`);
    if (!path.startsWith(site) || !existsSync(path)) {
      response.writeHead(404).end();
      return;
    }
    response
      .writeHead(200, { 'content-type': TYPES[extname(path)] ?? 'application/octet-stream', ...headers })
      .end(readFileSync(path));
  });
  await new Promise<void>((done) => server.listen(0, '127.0.0.1', done));
  origin = `http://127.0.0.1:${(server.address() as { port: number }).port}`;
});

afterAll(() => {
  server?.close();
});

async function visit(
  path: string,
  { wasm = true, extraHeaders = {} }: { wasm?: boolean; extraHeaders?: Record<string, string> } = {},
) {
  headers = extraHeaders;
  let browser: Browser | undefined;
  try {
    browser = await chromium.launch({ executablePath: CHROMIUM!, args: FLAGS });
    const page = await browser.newPage();
    // What a browser without WebAssembly shows a page (the engine's flag for it is gone from Chromium).
    if (!wasm) await page.addInitScript('delete globalThis.WebAssembly');
    const errors: string[] = [];
    page.on('pageerror', (error) => errors.push(error.message));
    await page.goto(`${origin}${path}`);
    await page.locator('#result', { hasText: /\S/ }).waitFor({ state: 'attached', timeout: 120_000 });
    const text = await page.textContent('#result');
    return { result: JSON.parse(text!), errors };
  } finally {
    await browser?.close();
  }
}

describe.each(['vite', 'esbuild'])('a page bundled with %s', (bundler) => {
  it('runs SIMD wasm in a worker, with the same bits as Node', async () => {
    const { result, errors } = await visit(`/${bundler}/index.html`);
    expect(errors).toEqual([]);
    expect(result).toMatchObject({
      backend: 'wasm-simd',
      info: { threads: 1, notices: [] },
      last: 1,
      abort: { code: 'ABORTED' },
    });
    expect(result.abort.after).toBeLessThan(50);
    expect(result.progress).toBeGreaterThan(5);
    expect(result.bits).toBe(nodeBits);
  });

  it('falls back to plain JavaScript where there is no WebAssembly, with the same bits', async () => {
    const { result, errors } = await visit(`/${bundler}/index.html`, { wasm: false });
    expect(errors).toEqual([]);
    expect(result).toMatchObject({ backend: 'js', info: { threads: 1 } });
    expect(result.bits).toBe(nodeBits);
  });
});

describe('a page under a strict policy', () => {
  it('says so and runs inline in plain JavaScript, with the same bits', async () => {
    const policy = "default-src 'none'; script-src 'self'; worker-src 'none'; connect-src 'none'";
    const { result } = await visit('/esbuild/index.html', {
      extraHeaders: { 'content-security-policy': policy },
    });
    expect(result).toMatchObject({ backend: 'js', info: { threads: 0 } });
    expect(result.info.notices).toHaveLength(1);
    expect(result.info.notices[0]).toMatch(/inline/);
    expect(result.bits).toBe(nodeBits);
  });
});
