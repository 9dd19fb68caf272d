/*
 * The networks of ten grown trees, of axis lengths and of effective lengths, against Stokes flow in their meshes. A line a tree,
 * in %: worst drop (network over Stokes) and worst share of the flow (Stokes over network). Needs python3-dolfin and tetgen;
 * a quarter of an hour on a shared core and 4.5 GB for all.
 * In the repository's folder:
 *   npm run build && node tests/bench/run.mjs judged [-- name …]
 */
import { mkdtempSync, rmSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { hasJudge, JUDGED_TREES, judgeTree } from '../support/judged-trees.ts';

const range = (values: readonly number[]): string =>
  `${(100 * Math.min(...values)).toFixed(1)} to ${(100 * Math.max(...values)).toFixed(1)}`.padStart(14);

if (!hasJudge()) {
  console.log('python3-dolfin or tetgen is not installed: nothing judged');
} else {
  const folder = mkdtempSync(join(tmpdir(), 'judged-'));
  const asked = process.argv.slice(2).filter((word) => JUDGED_TREES[word] !== undefined);
  console.log(
    'tree      caps    Re | effective:  drop         share | axis:     drop         share | unknowns      s   GB',
  );
  try {
    for (const name of asked.length > 0 ? asked : Object.keys(JUDGED_TREES)) {
      const got = judgeTree(name, folder, process.cwd());
      const pair = ({ drop, share }: typeof got.axis) => `${range(drop)}${range(share)}`;
      const cost = `${String(got.unknowns).padStart(8)}${String(got.seconds).padStart(7)}${String(got.memory_GB).padStart(5)}`;
      console.log(
        `${name.padEnd(10)}${String(got.patches.length + 1).padStart(4)}${got.reynolds.toFixed(1).padStart(6)} |${pair(got.effective)} |${pair(got.axis)} | ${cost}`,
      );
    }
  } finally {
    rmSync(folder, { recursive: true, force: true });
  }
}
