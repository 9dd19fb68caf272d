/*
 * Lumen meshes of a grown tree in a box, at two sizes and 12 and 24 segments. Prints triangles, the smallest angle, a
 * checksum of the corners, time and problems.
 *   node tests/bench/run.mjs mesh [-- quick]      quick: the small size at 12 segments once
 */
import { freezeGrowth } from '../../src/growth/freeze.ts';
import { growForest } from '../../src/growth/grow.ts';
import { buildLumen } from '../../src/mesh/build-lumen.ts';
import { measureLumen } from '../../src/mesh/measure-lumen.ts';
import { specFromValue } from '../../src/spec/parse.ts';
import { buildTissue } from '../../src/tissue/build-tissue.ts';
import { countVessels } from '../../src/tree/vessels.ts';

const quick = process.argv.includes('quick');
const CASES = quick
  ? ([[200, 12]] as const)
  : ([
      [500, 12],
      [500, 24],
      [2500, 12],
    ] as const);

for (const [count, around] of CASES) {
  const spec = specFromValue({
    name: 'bench box',
    seed: 'bench',
    tissue: { shape: 'box', min_mm: [0, 0, 0], max_mm: [20, 20, 20] },
    trees: [{ inlet: { position_mm: [0, 10, 10], direction: [1, 0, 0], flow_mL_min: 10 }, terminals: { count } }],
    sizing: { rule: 'junction-exponent', junction_exponent: 3, inlet_radius_um: 1120 },
    refine: 'none',
  });
  const forest = freezeGrowth(growForest(spec, buildTissue(spec.tissue, new Map(), [])).grower, spec);
  const start = performance.now();
  const mesh = buildLumen(forest, { around });
  const milliseconds = performance.now() - start;
  const figures = measureLumen(mesh);
  let hash = 0x811c9dc5;
  for (const byte of new Uint8Array(mesh.position.buffer)) hash = Math.imul(hash ^ byte, 0x01000193) >>> 0;
  console.log(
    `${countVessels(forest)} vessels, ${around} around: ${figures.triangles} triangles, ` +
      `smallest angle ${((figures.smallestAngle * 180) / Math.PI).toFixed(1)}°, ${mesh.problems.length} problems, ` +
      `${milliseconds.toFixed(0)} ms, ${((1000 * milliseconds) / countVessels(forest)).toFixed(0)} µs a vessel, ` +
      `corners ${hash.toString(16).padStart(8, '0')}`,
  );
}
