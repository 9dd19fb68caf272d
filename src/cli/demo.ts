import { spawnSync } from 'node:child_process';
import { fileURLToPath } from 'node:url';

/*
 * `npm run demo`: the modeller's and the CFD engineer's first task on the gel block, by the commands a user would type.
 * Vessels of 120 µm radius and more are meshed, 100 of 4,000, so that the whole takes half a minute at most.
 */

const RUN = 'out/gel-block';
const MESH = 'out/gel-block-mesh';

const COMMANDS: readonly (readonly string[])[] = [
  ['grow', 'gel-block', '--out', RUN],
  ['check', RUN],
  ['mesh', RUN, '--keep-above', '120', '--out', MESH],
  ['check', MESH],
];

const program = fileURLToPath(new URL('./main.js', import.meta.url));
const begin = performance.now();

for (const argv of COMMANDS) {
  process.stdout.write(`\n$ npx vesselwright ${argv.join(' ')}\n`);
  const { status } = spawnSync(process.execPath, [program, ...argv], { stdio: 'inherit' });
  if (status !== 0) process.exit(status ?? 70);
}

const seconds = Math.round((performance.now() - begin) / 1000);
process.stdout.write(`
Grown, solved, meshed and checked in ${seconds} s.
  the run    ${RUN}: tree.vtp, spec.json, report.json and report.html, which any browser opens
  the mesh   ${MESH}: lumen.stl, boundary.csv, network.csv and more, of vessels of 120 µm radius and more
  look at it npx vesselwright view ${RUN}
`);
