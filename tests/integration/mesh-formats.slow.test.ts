import { spawnSync } from 'node:child_process';
import { existsSync, mkdtempSync, readFileSync, rmSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import validator from 'gltf-validator';
import { afterAll, describe, expect, it } from 'vitest';
import { solveFlow } from '../../src/flow/solve.ts';
import { COLOUR_BY, encodeGlb } from '../../src/formats/mesh/glb.ts';
import { lumenFile, MESH_FORMATS } from '../../src/formats/mesh/mesh-formats.ts';
import { surfaceOfLumen } from '../../src/formats/mesh/mesh-surface.ts';
import { buildLumen } from '../../src/mesh/build-lumen.ts';
import { measureLumen } from '../../src/mesh/measure-lumen.ts';
import { forkSketch, randomSketch, type Sketch, sketchForest, straightSketch } from '../support/lumen-forests.ts';
import { readMsh } from '../support/mesh-readers.ts';

/*
 * Lumen surfaces in every format, handed to readers that are not ours: VTK, meshio, Gmsh, lib3mf and the validator of
 * glTF. Skipped where the tools are not installed. meshio 5.0 is not asked for the PLY: it takes the columns of a binary
 * one to stand one after another, and fails on any that has more than a list a face.
 */

const PYTHON = '/usr/bin/python3';
const SCRIPT = new URL('read-mesh-formats.py', import.meta.url).pathname;
const SILENT = process.env.CI === undefined;
const METRES = { m: 1, mm: 1e-3, um: 1e-6 };

/** Runs a tool; without a folder, only to see whether it is there. */
function run(folder: string | undefined, command: string, ...words: string[]) {
  const { stdout, stderr, status } = spawnSync(command, words, { cwd: folder, encoding: 'utf8' });
  return { out: stdout ?? '', text: `${stdout}${stderr}`, status };
}
const runs = (command: string, ...words: string[]): boolean => run(undefined, command, ...words).status === 0;
const readers = existsSync(PYTHON) && runs(PYTHON, '-c', 'import vtkmodules.vtkIOXML, meshio, numpy');
const lib3mf = existsSync(PYTHON) && runs(PYTHON, '-c', 'import ctypes; ctypes.CDLL("lib3MF.so.1")');
const gmsh = runs('gmsh', '--version');

const folders: string[] = [];
afterAll(() => {
  for (const folder of folders) rmSync(folder, { recursive: true });
});

const away = straightSketch(4e-4, 6e-3).map(([p, x, y, z, r]) => [p, x, y + 0.02, z, r] as const);
const CASES: readonly (readonly [string, 'm' | 'mm' | 'um', readonly Sketch[]])[] = [
  ['two trees in metres', 'm', [forkSketch(40, 30, 0.8, 0.6), away]],
  ['a random tree in millimetres', 'mm', [randomSketch('formats', { vessels: 30, leastRatio: 0.3 })]],
  ['vessels of 4 µm in micrometres', 'um', [forkSketch(30, 45, 0.8, 0.6, 4e-6)]],
];

describe.each(CASES)('%s', (_, unit, trees) => {
  const forest = sketchForest(...trees);
  const rootPressures = trees.map(() => 8000);
  const field = solveFlow(
    forest,
    trees.map(() => 'supply' as const),
    { rootPressures, viscosity: 3.5e-3, density: 1060 },
  );
  const mesh = buildLumen(forest);
  const { triangles, vertices, volume } = measureLumen(mesh);
  const surface = surfaceOfLumen(mesh, forest, field, unit);
  const names = mesh.patches.map(({ name }) => name);
  const counts = names.map((_, p) => mesh.patch.filter((patch) => patch === p).length);
  const folder = mkdtempSync(join(tmpdir(), 'formats-'));
  folders.push(folder);
  for (const format of MESH_FORMATS) writeFileSync(join(folder, lumenFile(format)), format.encode(surface));
  writeFileSync(join(folder, 'pressure.glb'), encodeGlb(surface, 'pressure'));

  it('passes the validator of glTF without a word', async () => {
    for (const by of COLOUR_BY) {
      const { issues, info } = await validator.validateBytes(encodeGlb(surface, by));
      expect(issues).toMatchObject({ numErrors: 0, numWarnings: 0, numInfos: 0, numHints: 0 });
      expect(info).toMatchObject({ drawCallCount: names.length, totalTriangleCount: triangles });
    }
  });

  it.skipIf(SILENT && !readers)('holds the same triangles for VTK, meshio and lib3mf', () => {
    const { out, text, status } = run(folder, PYTHON, SCRIPT, folder, String(METRES[unit]));
    expect(status, text).toBe(0);
    const found = JSON.parse(out.slice(out.indexOf('{"vtp"')));
    expect(found.vtp.cells).toBe(triangles);
    expect(found.ply).toMatchObject({ same: true, points: vertices, open: 0 });
    expect(found.obj).toMatchObject({ same: true, points: vertices, open: 0, groups: counts, meshio: true });
    // VTK sums the volume in float32 coordinates.
    for (const one of [found.ply, found.obj]) expect(one.volume / volume).toBeCloseTo(1, 3);
    expect(found.vtu).toEqual({ same: true, meshio: true, meshioPressure: true, names, arrays: true });
    expect(found.glb).toMatchObject({ same: true, parts: counts, colours: 0 });
    // Corners on the rim of a cap stand in the wall and in the cap.
    expect(found.glb.byPressure).toBeGreaterThan(vertices);
    expect(found.msh4).toEqual({
      same: true,
      points: vertices,
      cells: counts,
      names: Object.fromEntries(names.map((name, p) => [name, p + 1])),
      tags: names.map((_, p) => [p + 1]),
    });
    if (SILENT && !lib3mf) return;
    expect(found['3mfBroken'].error).toMatch(/lib3mf_reader/);
    expect(found['3mf']).toMatchObject({
      warnings: 0,
      unit: unit === 'um' ? 0 : 1,
      metadata: 2,
      objects: [{ points: vertices, cells: triangles, closed: true }],
    });
    expect(found['3mf'].objects).toHaveLength(1);
    expect(found['3mf'].objects[0].off).toBeLessThan(2 ** -23);
  });

  it.skipIf(SILENT && !gmsh)('is read by Gmsh from its MSH 4.1 and written again with the same patches', () => {
    const { text, status } = run(folder, 'gmsh', '-0', 'lumen_4.msh', '-format', 'msh22', '-o', 'again.msh');
    expect(text).not.toMatch(/^(Error|Warning)/m);
    expect(status, text).toBe(0);
    const again = readFileSync(join(folder, 'again.msh'), 'utf8').replace(
      '$PhysicalNames',
      `$Comments\nunit of length ${unit}\n$EndComments\n$PhysicalNames`,
    );
    const [before, after] = [readFileSync(join(folder, 'lumen_4.msh')), Buffer.from(again)].map((bytes) => {
      const { corners, patch } = readMsh(bytes);
      return { corners: corners.flat(), patch };
    });
    expect(after!.patch).toEqual(before!.patch);
    // Gmsh writes 16 digits.
    const off = before!.corners.filter((x, i) => Math.abs(after!.corners[i]! - x) > 1e-15 * Math.abs(x));
    expect(off).toEqual([]);
    expect(after!.corners).toHaveLength(before!.corners.length);
  });

  it.skipIf(trees.length > 1 || (SILENT && !gmsh))('is filled by Gmsh from its MSH 4.1, patch names kept', () => {
    const loop = names.map((_, p) => p + 1).join(', ');
    writeFileSync(
      join(folder, 'fill.geo'),
      `Merge "lumen_4.msh";\nSurface Loop(1) = {${loop}};\nVolume(1) = {1};\nPhysical Volume("lumen", 1) = {1};\n`,
    );
    const { text, status } = run(folder, 'gmsh', '-3', '-format', 'msh2', '-o', 'filled.msh', 'fill.geo');
    expect(text).not.toMatch(/^Error/m);
    expect(status).toBe(0);
    const filled = readFileSync(join(folder, 'filled.msh'), 'utf8');
    for (const name of names) expect(filled).toContain(`"${name}"`);
    expect([...filled.matchAll(/^\d+ 4 \d+ /gm)].length).toBeGreaterThan(triangles / 2);
  });
});
