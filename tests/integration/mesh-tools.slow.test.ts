import { spawnSync } from 'node:child_process';
import { existsSync, mkdtempSync, readFileSync, rmSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { afterAll, describe, expect, it } from 'vitest';
import { solveFlow } from '../../src/flow/solve.ts';
import { encodeMeshFolder } from '../../src/formats/mesh/mesh-folder.ts';
import { buildLumen } from '../../src/mesh/build-lumen.ts';
import { measureLumen } from '../../src/mesh/measure-lumen.ts';
import { forkSketch, randomSketch, type Sketch, sketchForest } from '../support/lumen-forests.ts';

/*
 * Lumen meshes handed to volume meshers and readers as they are: TetGen and Gmsh fill them, admesh finds nothing to
 * mend, VTK and meshio find what was written. Skipped where the tools are not installed.
 */

const PYTHON = '/usr/bin/python3';
const SCRIPT = new URL('read-lumen.py', import.meta.url).pathname;
const SILENT = process.env.CI === undefined;

function has(command: string, ...words: string[]): boolean {
  return spawnSync(command, words).error === undefined;
}

const readers =
  existsSync(PYTHON) && spawnSync(PYTHON, ['-c', 'import vtkmodules.vtkIOXML, meshio, numpy']).status === 0;
const folders: string[] = [];
afterAll(() => {
  for (const folder of folders) rmSync(folder, { recursive: true });
});

const CASES: readonly (readonly [string, Sketch])[] = [
  ['a fork', forkSketch(37.5, 37.5, 0.79, 0.79)],
  ['a sharp fork', forkSketch(12.5, 12.5, 0.79, 0.79)],
  ['a thin side branch', forkSketch(60, 0, 0.1, 0.99)],
  ['a vessel of 4 µm', forkSketch(30, 45, 0.8, 0.6, 4e-6)],
  ['a random tree', randomSketch('tools', { vessels: 30, leastRatio: 0.3 })],
];

describe.each(CASES)('%s', (_, sketch) => {
  const forest = sketchForest(sketch);
  const field = solveFlow(forest, ['supply'], { rootPressures: [8000], viscosity: 3.5e-3, density: 1060 });
  const mesh = buildLumen(forest);
  const figures = measureLumen(mesh);
  const folder = mkdtempSync(join(tmpdir(), 'lumen-'));
  folders.push(folder);
  for (const { name, bytes } of encodeMeshFolder({
    mesh,
    forest,
    field,
    kinds: ['supply'],
    density: 1060,
    viscosity: 3.5e-3,
  })) {
    writeFileSync(join(folder, name), bytes);
  }
  const run = (command: string, ...words: string[]) => {
    const { stdout, stderr, status } = spawnSync(command, words, { cwd: folder, encoding: 'utf8' });
    return { text: stdout + stderr, status };
  };

  it.skipIf(SILENT && !has('tetgen', '-h'))('is filled by TetGen, every triangle kept', () => {
    // -Y keeps the surface as it is, -p takes it as a boundary.
    const { text } = run('tetgen', '-pY', 'lumen.stl');
    expect(text).not.toMatch(/intersect|overlap|degenerate|error/i);
    const tetrahedra = Number(readFileSync(join(folder, 'lumen.1.ele'), 'utf8').trim().split(/\s+/)[0]);
    expect(tetrahedra).toBeGreaterThan(figures.triangles / 2);
    const faces = Number(readFileSync(join(folder, 'lumen.1.face'), 'utf8').trim().split(/\s+/)[0]);
    expect(faces).toBe(figures.triangles);
    const count = Number(readFileSync(join(folder, 'lumen.1.node'), 'utf8').trim().split(/\s+/)[0]);
    expect(count).toBeGreaterThanOrEqual(figures.vertices);
  });

  it.skipIf(SILENT && !has('gmsh', '--version'))('is filled by Gmsh from its MSH, patch names kept', () => {
    const surfaces = mesh.patches.map((_, i) => i + 1).join(', ');
    writeFileSync(
      join(folder, 'fill.geo'),
      `Merge "lumen.msh";\nSurface Loop(1) = {${surfaces}};\nVolume(1) = {1};\nPhysical Volume("lumen", 1) = {1};\n`,
    );
    const { text, status } = run('gmsh', '-3', '-format', 'msh2', '-o', 'filled.msh', 'fill.geo');
    expect(text).not.toMatch(/^Error/m);
    expect(status).toBe(0);
    const filled = readFileSync(join(folder, 'filled.msh'), 'utf8');
    for (const patch of mesh.patches) expect(filled).toContain(`"${patch.name}"`);
    const tetrahedra = [...filled.matchAll(/^\d+ 4 \d+ /gm)].length;
    expect(tetrahedra).toBeGreaterThan(figures.triangles / 2);
  });

  it.skipIf(SILENT && !has('gmsh', '--version'))('is read by Gmsh from its STL, a surface a solid', () => {
    const surfaces = mesh.patches.map((_, i) => i + 1).join(', ');
    writeFileSync(join(folder, 'stl.geo'), `Merge "lumen.stl";\nSurface Loop(1) = {${surfaces}};\nVolume(1) = {1};\n`);
    const { text } = run('gmsh', '-3', '-format', 'msh2', '-o', 'stl.msh', 'stl.geo');
    expect(text).not.toMatch(/^Error/m);
    expect([...readFileSync(join(folder, 'stl.msh'), 'utf8').matchAll(/^\d+ 4 \d+ /gm)].length).toBeGreaterThan(1000);
  });

  it.skipIf(SILENT && !has('admesh', '--version'))('leaves admesh nothing to mend in its one solid', () => {
    const { text, status } = run('admesh', 'lumen_one_solid.stl');
    expect(status).toBe(0);
    const number = (label: RegExp): number => Number(label.exec(text)?.[1] ?? Number.NaN);
    expect(number(/Number of facets\s*:\s*(\d+)/)).toBe(figures.triangles);
    for (const label of [
      /Degenerate facets\s*:\s*(\d+)/,
      /Edges fixed\s*:\s*(\d+)/,
      /Facets removed\s*:\s*(\d+)/,
      /Facets added\s*:\s*(\d+)/,
      /Facets reversed\s*:\s*(\d+)/,
      /Backwards edges\s*:\s*(\d+)/,
      /Total disconnected facets\s*:\s*(\d+)/,
    ]) {
      expect(number(label), String(label)).toBe(0);
    }
    expect(number(/Number of parts\s*:\s*(\d+)/)).toBe(1);
  });

  it.skipIf(SILENT && !readers)('is read by VTK and meshio as it was written', () => {
    const { text, status } = run(PYTHON, SCRIPT, folder);
    expect(status, text).toBe(0);
    const found = JSON.parse(text.slice(text.indexOf('{"vtp"')));
    expect(found.vtp).toMatchObject({ points: figures.vertices, cells: figures.triangles, open: 0, unit: 'm' });
    expect(found.vtp.volume / figures.volume).toBeCloseTo(1, 3);
    expect(found.vtp.patches).toEqual(mesh.patches.map((patch) => patch.name).sort());
    expect(found.vtp.vessels).toEqual([0, Math.max(...mesh.vessel)]);
    expect(found.vtp.pressure[1]).toBeCloseTo(8000, 9);
    expect(found.vtp.pressure[0]).toBeCloseTo(Math.min(...field.pressure), 9);
    expect(found.vtp.shear[1]).toBeCloseTo(Math.max(...field.wallShear), 9);
    expect(found.stl).toMatchObject({ cells: figures.triangles, meshioCells: figures.triangles });
    expect(found.msh).toMatchObject({ points: figures.vertices, cells: figures.triangles });
    expect(found.msh.names).toEqual(Object.fromEntries(mesh.patches.map((patch, i) => [patch.name, i + 1])));
    expect(found.msh.tags).toEqual(mesh.patches.map((_, i) => i + 1));
    for (let k = 0; k < 3; k++) {
      const axis = mesh.position.filter((_, i) => i % 3 === k);
      expect(found.msh.low[k]).toBe(Math.min(...axis));
      expect(found.msh.high[k]).toBe(Math.max(...axis));
    }
  });
});
