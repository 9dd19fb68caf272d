// Bundles one bench or all of them to plain JavaScript, so that every Node runs them at full speed, and runs them:
//   node tests/bench/run.mjs [name …] [-- arguments of the bench]

import { spawnSync } from 'node:child_process';
import { mkdtempSync, readdirSync, rmSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { rolldown } from 'rolldown';

const here = import.meta.dirname;
const at = process.argv.indexOf('--');
const names = process.argv.slice(2, at < 0 ? undefined : at);
const rest = at < 0 ? [] : process.argv.slice(at + 1);
const all = readdirSync(here)
  .filter((file) => file.endsWith('.bench.ts'))
  .map((file) => file.slice(0, -'.bench.ts'.length));
const unknown = names.filter((name) => !all.includes(name));
if (unknown.length > 0) {
  console.error(`no bench called ${unknown.join(', ')}; there are ${all.join(', ')}`);
  process.exit(2);
}
const folder = mkdtempSync(join(tmpdir(), 'bench-'));
let worst = 0;
try {
  for (const name of names.length > 0 ? names : all) {
    console.log(`== ${name}`);
    const bundle = await rolldown({ input: join(here, `${name}.bench.ts`), platform: 'node', logLevel: 'silent' });
    const file = join(folder, `${name}.mjs`);
    await bundle.write({ file, format: 'esm' });
    const run = spawnSync(process.execPath, ['--expose-gc', file, ...rest], { stdio: 'inherit' });
    worst = Math.max(worst, run.status ?? 1);
  }
} finally {
  rmSync(folder, { recursive: true, force: true });
}
process.exit(worst);
