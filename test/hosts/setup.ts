import { execFileSync } from 'node:child_process';
import { mkdtempSync, readdirSync, rmSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join, resolve } from 'node:path';
import type { TestProject } from 'vitest/node';

declare module 'vitest' {
  interface ProvidedContext {
    /** The packed package. */
    tarball: string;
    /** A folder outside the checkout, so that nothing is found by accident. */
    scratch: string;
  }
}

/** Builds and packs once, into a folder that is removed at the end. */
export default function setup(project: TestProject): () => void {
  const root = resolve(import.meta.dirname, '../..');
  const scratch = mkdtempSync(join(tmpdir(), 'leadspan-hosts-'));
  execFileSync('npm', ['run', 'build'], { cwd: root, stdio: 'pipe' });
  execFileSync('npm', ['pack', '--pack-destination', scratch], { cwd: root, stdio: 'pipe' });
  const tarball = join(scratch, readdirSync(scratch).find((file) => file.endsWith('.tgz'))!);
  project.provide('tarball', tarball);
  project.provide('scratch', scratch);
  return () => rmSync(scratch, { recursive: true, force: true });
}
