import { spawnSync } from 'node:child_process';
import { existsSync, mkdirSync, mkdtempSync, readFileSync, rmSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { afterAll, describe, expect, it } from 'vitest';
import { solveFlow } from '../../src/flow/solve.ts';
import { encodeVolumeMsh } from '../../src/formats/mesh/volume-msh.ts';
import { encodeVolumeVtu } from '../../src/formats/mesh/volume-vtu.ts';
import { buildLumen } from '../../src/mesh/build-lumen.ts';
import { buildVolume } from '../../src/volume/build-volume.ts';
import { measureVolume } from '../../src/volume/measure-volume.ts';
import { solveVolumeFlow } from '../../src/volume/volume-flow.ts';
import { bendSketch, forkSketch, randomSketch, type Sketch, sketchForest } from '../support/lumen-forests.ts';

/*
 * Volume meshes handed to others as they are: VTK and meshio find what was written and no cell turned over, Gmsh reads the
 * MSH, and OpenFOAM's own check of a mesh finds nothing wrong. Skipped where the tools are not installed.
 */

const PYTHON = '/usr/bin/python3';
const SCRIPT = new URL('read-volume.py', import.meta.url).pathname;
const SILENT = process.env.CI === undefined;

function has(command: string, ...words: string[]): boolean {
  return spawnSync(command, words).error === undefined;
}

const readers =
  existsSync(PYTHON) && spawnSync(PYTHON, ['-c', 'import vtkmodules.vtkIOXML, meshio, numpy']).status === 0;
const FOAM = { ...process.env, WM_PROJECT_DIR: process.env.WM_PROJECT_DIR ?? '/usr/share/openfoam' };
const folders: string[] = [];
afterAll(() => {
  for (const folder of folders) rmSync(folder, { recursive: true });
});

const CASES: readonly (readonly [string, Sketch, number, number])[] = [
  ['a fork of 75°', forkSketch(37.5, 37.5, 0.79, 0.79), 24, 3],
  ['a fork of 25°', forkSketch(12.5, 12.5, 0.79, 0.79), 24, 3],
  ['a fork of 120° without layers', forkSketch(60, 60, 0.79, 0.79), 24, 0],
  ['a daughter of a fifth', forkSketch(10, 65, 0.95, 0.2), 24, 3],
  ['a bend of few segments', bendSketch(90), 12, 5],
  ['a fork of 4 µm', forkSketch(30, 45, 0.8, 0.6, 4e-6), 16, 3],
  ['a random tree', randomSketch('a', { vessels: 12 }), 24, 3],
];

/** Entries of an OpenFOAM dictionary that are needed to open a mesh, though not used. */
const DICTIONARIES: Readonly<Record<string, string>> = {
  controlDict:
    'application simpleFoam; startFrom startTime; startTime 0; stopAt endTime; endTime 1; deltaT 1; writeInterval 1;',
  fvSchemes:
    'ddtSchemes { default steadyState; } gradSchemes { default Gauss linear; } divSchemes { default none; }' +
    ' laplacianSchemes { default Gauss linear corrected; } interpolationSchemes { default linear; }' +
    ' snGradSchemes { default corrected; }',
  fvSolution: '',
};

describe.each(CASES)('the volume of %s', (_, sketch, around, layers) => {
  const forest = sketchForest(sketch);
  const kinds = ['supply'] as const;
  const field = solveFlow(forest, kinds, { rootPressures: [8000], viscosity: 3.5e-3, density: 1060 });
  const volume = buildVolume(buildLumen(forest, { around }), forest, { layers });
  const figures = measureVolume(volume);
  const folder = mkdtempSync(join(tmpdir(), 'volume-'));
  folders.push(folder);
  writeFileSync(
    join(folder, 'lumen_volume.vtu'),
    encodeVolumeVtu(volume, solveVolumeFlow(volume, forest, field, kinds), 'm'),
  );
  writeFileSync(join(folder, 'lumen_volume.msh'), encodeVolumeMsh(volume, 'm'));
  const run = (command: string, ...words: string[]) => {
    const { stdout, stderr, status } = spawnSync(command, words, { cwd: folder, encoding: 'utf8', env: FOAM });
    return { text: stdout + stderr, status };
  };

  it.skipIf(SILENT && !readers)('is read by VTK and meshio, every cell of positive volume', () => {
    const { text, status } = run(PYTHON, SCRIPT, folder);
    expect(status, text).toBe(0);
    const found = JSON.parse(text.slice(text.indexOf('{"cells"')));
    expect(found).toMatchObject({
      cells: figures.cells,
      points: figures.points,
      velocity: [figures.points, 3],
      mshPoints: figures.points,
      names: [...volume.patches.map(({ name }) => name), 'lumen'].sort(),
    });
    for (const least of found.leastVolume) expect(least).toBeGreaterThan(0);
    // VTK cuts the turned faces of prisms in one of two ways.
    expect(found.volume / figures.volume).toBeCloseTo(1, 2);
    expect(found.leastTetrahedron).toBeCloseTo(figures.leastOf.tetrahedron, 9);
    expect(found.msh).toMatchObject({ tetra: figures.tetrahedra, wedge: figures.prisms, pyramid: figures.pyramids });
  });

  it.skipIf(SILENT && !has('gmsh', '--version'))('is read by Gmsh, no Jacobian below 0', () => {
    writeFileSync(
      join(folder, 'look.geo'),
      'Merge "lumen_volume.msh";\nPlugin(AnalyseMeshQuality).JacobianDeterminant = 1;\n' +
        'Plugin(AnalyseMeshQuality).CreateView = 0;\nPlugin(AnalyseMeshQuality).DimensionOfElements = 3;\n' +
        'Plugin(AnalyseMeshQuality).Run;\n',
    );
    const { text, status } = run('gmsh', '-', 'look.geo');
    expect(text).not.toMatch(/^Error/m);
    expect(status, text).toBe(0);
    // Its bound of the least Jacobian of all cells, over all of each cell.
    expect(Number(/minJ {2,}= +([-\d.e+]+),/.exec(text)![1])).toBeGreaterThan(0);
    expect(text).toContain(`checking the Jacobian of ${figures.cells} elements`);
  });

  it.skipIf(SILENT && !has('checkMesh', '-help'))('passes the check of a finite-volume solver', () => {
    mkdirSync(join(folder, 'system'));
    mkdirSync(join(folder, 'constant'));
    for (const [name, text] of Object.entries(DICTIONARIES)) {
      const head = `FoamFile { version 2.0; format ascii; class dictionary; object ${name}; }\n`;
      writeFileSync(join(folder, 'system', name), head + text);
    }
    expect(run('gmshToFoam', 'lumen_volume.msh').status).toBe(0);
    const { text } = run('checkMesh');
    expect(text).toContain('Mesh OK.');
    expect(text).toContain(`cells:            ${figures.cells}\n`);
    const boundary = readFileSync(join(folder, 'constant', 'polyMesh', 'boundary'), 'utf8');
    for (const { name } of volume.patches) expect(boundary).toContain(name);
    const of = (pattern: RegExp): number => Number(pattern.exec(text)![1]);
    expect(of(/Max skewness = ([\d.]+)/)).toBeLessThan(4);
    expect(of(/non-orthogonality Max: ([\d.]+)/)).toBeLessThan(85);
    expect(of(/Max aspect ratio = ([\d.]+)/)).toBeLessThan(100);
  });
});
