import { spawnSync } from 'node:child_process';
import { createHash } from 'node:crypto';
import { mkdtempSync, readFileSync, rmSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';

/*
 * The same spec and seed give the same bytes on every Node the program supports, and twice on one. The versions come
 * as npm packages, which carry Node itself; the built program is run, as users have it.
 */

const MAIN = new URL('../../dist/cli/main.js', import.meta.url).pathname;
const VERSIONS = ['20.19.5', '22', '24'];
const CASES: readonly (readonly [string, ...string[]])[] = [
  ['gel-block', '--terminals', '400'],
  ['lobe', '--terminals', '200'],
  ['hollow-wall', '--terminals', '200'],
  ['bean', '--terminals', '100'],
  ['explicit-points'],
  // Large enough for several threads, one of which is the only one elsewhere.
  ['gel-block', '--terminals', '9000', '--refine', 'quick', '--workers', '3'],
];

describe('the same bytes', () => {
  const scratch = mkdtempSync(join(tmpdir(), 'nodes-'));
  const binaries = new Map<string, string>();
  beforeAll(() => {
    for (const version of VERSIONS) {
      const folder = join(scratch, `node-${version}`);
      const install = spawnSync(
        'npm',
        ['install', '--prefix', folder, '--no-save', '--engine-strict=false', `node@${version}`],
        {
          encoding: 'utf8',
          cwd: tmpdir(),
        },
      );
      expect(install.status, install.stderr).toBe(0);
      binaries.set(version, join(folder, 'node_modules/node/bin/node'));
    }
    binaries.set('this', process.execPath);
  });
  afterAll(() => rmSync(scratch, { recursive: true, force: true }));

  for (const argv of CASES) {
    const name = argv.join(' ');
    it(name, () => {
      const sums = new Map<string, string>();
      for (const [version, binary] of binaries) {
        const out = join(scratch, `${name}-${version}`);
        const last = version === 'this' && argv.includes('--workers') ? ['--workers', '1'] : [];
        const run = spawnSync(binary, [MAIN, 'grow', ...argv, ...last, '--out', out, '--quiet'], { encoding: 'utf8' });
        expect(run.status, `${version}: ${run.stderr}`).toBe(0);
        sums.set(
          version,
          createHash('sha256')
            .update(readFileSync(join(out, 'tree.vtp')))
            .digest('hex'),
        );
      }
      expect(sums.size).toBe(VERSIONS.length + 1);
      expect(new Set(sums.values()).size, JSON.stringify([...sums])).toBe(1);
    });
  }

  it('runs under different versions at all', () => {
    const said = [...binaries.values()].map((binary) =>
      spawnSync(binary, ['--version'], { encoding: 'utf8' }).stdout.trim(),
    );
    expect(new Set(said.map((version) => version.split('.')[0])).size).toBe(3);
  });
});
