import { describe, expect, it } from 'vitest';
import { decodeText } from '../../../../src/core/text.ts';
import { solveFlow } from '../../../../src/flow/solve.ts';
import { encodeMeshFolder } from '../../../../src/formats/mesh/mesh-folder.ts';
import { lumenFile, MESH_FORMATS, meshFormatsOf } from '../../../../src/formats/mesh/mesh-formats.ts';
import { surfaceOfLumen } from '../../../../src/formats/mesh/mesh-surface.ts';
import { addMeshFormats } from '../../../../src/formats/mesh/more-formats.ts';
import { buildLumen } from '../../../../src/mesh/build-lumen.ts';
import { sketchForest, straightSketch } from '../../../support/lumen-forests.ts';

const forest = sketchForest(straightSketch(1e-3, 8e-3));
const field = solveFlow(forest, ['supply'], { rootPressures: [8000], viscosity: 3.5e-3, density: 1060 });
const mesh = buildLumen(forest);
const input = { mesh, forest, field, kinds: ['supply'], density: 1060, viscosity: 3.5e-3, unit: 'mm' } as const;
const plain = encodeMeshFolder(input);
const bytesOf = (files: typeof plain, name: string) => files.find((file) => file.name === name)!.bytes;
const notesOf = (files: typeof plain) => JSON.parse(decodeText(bytesOf(files, 'mesh.json')));

describe('addMeshFormats', () => {
  it('adds every format to a folder, made as from the mesh itself, and lists them in mesh.json', () => {
    const files = addMeshFormats(plain, MESH_FORMATS, { colourBy: 'pressure' });
    expect(files.map(({ name }) => name)).toEqual([
      ...plain.map(({ name }) => name).filter((name) => name !== 'mesh.json'),
      ...['lumen.ply', 'lumen.obj', 'lumen.glb', 'lumen.3mf', 'lumen_4.msh', 'lumen.vtu', 'mesh.json'],
    ]);
    const surface = surfaceOfLumen(mesh, forest, field, 'mm');
    for (const format of MESH_FORMATS) {
      // The STL of the folder is made from metres: its normals may differ in the last digit.
      if (format.id === 'stl') continue;
      expect(bytesOf(files, lumenFile(format)), format.id).toEqual(format.encode(surface, { colourBy: 'pressure' }));
    }
    const { files: listed, ...notes } = notesOf(files);
    expect(listed.map(({ name }: { name: string }) => name).sort()).toEqual(
      files
        .map(({ name }) => name)
        .filter((name) => name !== 'mesh.json')
        .sort(),
    );
    const unit = Object.fromEntries(listed.map((one: { name: string; unit: string }) => [one.name, one.unit]));
    expect(unit).toMatchObject({ 'lumen.stl': 'mm', 'lumen.glb': 'm', 'lumen.3mf': 'mm', 'boundary.csv': 'm' });
    expect(listed.find((one: { name: string }) => one.name === 'lumen.glb')).toEqual({
      name: 'lumen.glb',
      unit: 'm',
      holds_no: ['vessels', 'pressures', 'wall shear', 'digits beyond float32'],
      colour_by: 'pressure',
    });
    expect(notes).toEqual({ ...notesOf(plain), files: undefined });
  });

  it('leaves a folder alone that has what is asked for', () => {
    expect(addMeshFormats(plain, meshFormatsOf('stl,vtp,msh', '--formats'))).toEqual(plain);
    expect(
      notesOf(plain)
        .files.map(({ name }: { name: string }) => name)
        .sort(),
    ).toEqual(
      plain
        .map(({ name }) => name)
        .filter((name) => name !== 'mesh.json')
        .sort(),
    );
  });
});
