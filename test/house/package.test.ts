import { readFileSync } from 'node:fs';
import { resolve } from 'node:path';
import { describe, expect, it } from 'vitest';
import { VERSION } from '../../src/base/version.ts';

const manifest = JSON.parse(readFileSync(resolve(import.meta.dirname, '../../package.json'), 'utf8'));

describe('package', () => {
  it('says the same version in code and manifest', () => {
    expect(VERSION).toBe(manifest.version);
  });

  it('has a changelog entry for the version', () => {
    const changelog = readFileSync(resolve(import.meta.dirname, '../../CHANGELOG.md'), 'utf8');
    expect(changelog).toContain(`## ${manifest.version}`);
  });
});
