/*
 * Lumen meshes of grown random trees: 5 to 500 vessels, three sizing rules, exponents 2.2 to 3.5, five tissues, angles from
 * the least allowed up. Each is held to the check's promises, then filled by TetGen, which stops at a surface that crosses
 * itself, and by Gmsh. Prints a line a tree that misses something, then the counts, the least angle and the time.
 *   node tests/bench/run.mjs lumens [-- key=value …]
 *     trees=300 from=0 around=12    which trees (numbers from … from + trees − 1 of one list), segments round a vessel
 *     gmsh=1                        0: TetGen alone
 *     quick                         3 trees of at most 40 vessels, no outside tool
 * Debian's packages: tetgen gmsh. Exit code 1 where anything is missed.
 */
import { spawnSync } from 'node:child_process';
import { mkdtempSync, readFileSync, rmSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { randomStream } from '../../src/core/random.ts';
import { checkLumen, growRun, InputError, meshTree, specFromValue } from '../../src/index.ts';

const words = new Map(process.argv.slice(2).map((word) => word.split('=', 2) as [string, string]));
const quick = words.has('quick');
const trees = Number(words.get('trees') ?? (quick ? 3 : 300));
const from = Number(words.get('from') ?? 0);
const around = Number(words.get('around') ?? 12);
const outside = !quick;
const gmsh = outside && words.get('gmsh') !== '0';

const TISSUES = [
  { shape: 'box', min_mm: [0, 0, 0], max_mm: [12, 12, 6] },
  { shape: 'sphere', center_mm: [6, 6, 3], radius_mm: 6 },
  { shape: 'ellipsoid', center_mm: [6, 6, 3], radii_mm: [6, 8, 4] },
  { shape: 'cylinder', from_mm: [0, 6, 3], to_mm: [14, 6, 3], radius_mm: 5 },
  {
    shape: 'difference',
    of: { shape: 'box', min_mm: [0, 0, 0], max_mm: [12, 12, 6] },
    minus: [{ shape: 'cylinder', from_mm: [8, 6, -1], to_mm: [8, 6, 7], radius_mm: 2 }],
  },
];

function specOf(k: number) {
  const random = randomStream('lumens', String(k));
  const draw = (low: number, high: number) => low + (high - low) * random.next();
  // Even over the logarithm of the size.
  const most = quick ? 40 : 500;
  const vessels = Math.exp(draw(Math.log(5), Math.log(most)));
  const count = Math.max(3, Math.round((vessels + 1) / 2));
  const exponent = Math.round(100 * draw(2.2, 3.5)) / 100;
  const inlet = { position_mm: [0, 6, 3], direction: [1, 0, 0], pressure_mmHg: 60, flow_mL_min: 1.2 };
  const sizing = [
    { rule: 'pressure-matched', junction_exponent: exponent },
    { rule: 'junction-exponent', junction_exponent: exponent, inlet_radius_um: draw(250, 500) },
    { rule: 'least-power', maintenance_W_m3: Math.round(draw(300, 3000)) },
  ][k % 3]!;
  return specFromValue({
    name: `tree ${k}`,
    seed: String(k),
    tissue: TISSUES[k % TISSUES.length],
    trees: [{ name: 'a', inlet, terminals: { count, pressure_mmHg: Math.round(draw(20, 50)) } }],
    sizing,
    clearance: { gap_um: Math.round(draw(0, 40)) },
    junctions: { min_angle_deg: Math.round(draw(15, 30)) },
    refine: 'none',
  });
}

const folder = mkdtempSync(join(tmpdir(), 'lumens-'));
const started = performance.now();
let held = 0;
let tetgenFilled = 0;
let gmshFilled = 0;
let made = 0;
let vessels = 0;
let triangles = 0;
let least = Infinity;
let seconds = 0;
try {
  for (let k = from; k < from + trees; k++) {
    const faults: string[] = [];
    try {
      const spec = specOf(k);
      const grown = growRun(spec, new Map());
      const start = performance.now();
      const mesh = meshTree(grown.record, spec, { around });
      seconds += (performance.now() - start) / 1000;
      made++;
      vessels += mesh.vessels;
      triangles += mesh.mesh.triangle.length / 3;
      const bytes = (name: string) => mesh.files.find((file) => file.name === name)!.bytes;
      const check = checkLumen({
        surface: bytes('lumen.stl'),
        boundary: bytes('boundary.csv'),
        network: bytes('network.csv'),
        notes: bytes('mesh.json'),
      });
      if (check.held && mesh.mesh.problems.length === 0) held++;
      for (const { why, vessel } of mesh.mesh.problems) faults.push(`vessel ${vessel}: ${why}`);
      for (const promise of check.promises) {
        if (promise.held === false)
          faults.push(`${promise.id}: ${promise.failures}, worst ${promise.worst} ${promise.where}`);
        if (promise.id === 'mesh-angle' && promise.worst !== null) least = Math.min(least, promise.worst);
      }
      if (outside) {
        writeFileSync(join(folder, 'lumen.stl'), bytes('lumen_one_solid.stl'));
        writeFileSync(join(folder, 'lumen.msh'), bytes('lumen.msh'));
        const filled = spawnSync('tetgen', ['-pYQ', 'lumen.stl'], { cwd: folder, encoding: 'utf8' });
        const told = filled.stdout + filled.stderr;
        if (filled.status === 0 && !/intersect|overlap|degenerate|error/i.test(told) && filledBy(folder))
          tetgenFilled++;
        else faults.push(`TetGen: ${told.trim().split('\n').slice(-2).join(' ')}`);
        for (const end of ['node', 'ele', 'face', 'edge', 'smesh'])
          rmSync(join(folder, `lumen.1.${end}`), { force: true });
      }
      if (gmsh) {
        writeFileSync(
          join(folder, 'fill.geo'),
          'Merge "lumen.msh";\ns() = Surface{:};\nSurface Loop(1) = s();\nVolume(1) = {1};\n',
        );
        const filled = spawnSync('gmsh', ['-3', 'fill.geo', '-o', 'filled.msh'], { cwd: folder, encoding: 'utf8' });
        if (filled.status === 0 && !/error/i.test(filled.stdout + filled.stderr)) gmshFilled++;
        else faults.push(`Gmsh: ${/.*error.*/i.exec(filled.stdout + filled.stderr)?.[0] ?? filled.status}`);
      }
    } catch (error) {
      if (!(error instanceof InputError)) throw error;
      faults.push(`not grown: ${error.message}`);
    }
    for (const fault of faults) console.log(`tree ${k}: ${fault}`);
    if ((k + 1) % 50 === 0)
      console.log(`${k + 1 - from} trees, ${((performance.now() - started) / 1000).toFixed(0)} s`);
  }
} finally {
  rmSync(folder, { recursive: true, force: true });
}
console.log(
  `${made} of ${trees} trees grown, ${vessels} vessels, ${triangles} triangles at ${around} around; ${held} hold every promise, ` +
    `least angle ${((180 * least) / Math.PI).toFixed(1)}°; filled by TetGen ${outside ? tetgenFilled : '(not asked)'}, ` +
    `by Gmsh ${gmsh ? gmshFilled : '(not asked)'}; meshed in ${seconds.toFixed(1)} s`,
);
const good =
  made === trees && held === trees && (!outside || tetgenFilled === trees) && (!gmsh || gmshFilled === trees);
process.exitCode = good ? 0 : 1;

/** Whether TetGen wrote tetrahedra. */
function filledBy(place: string): boolean {
  try {
    return Number(readFileSync(join(place, 'lumen.1.ele'), 'utf8').trim().split(/\s+/)[0]) > 0;
  } catch {
    return false;
  }
}
