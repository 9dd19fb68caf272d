import { describe, expect, it } from 'vitest';
import { checkLumen } from '../../../../src/check/lumen/check-lumen.ts';
import { decodeText } from '../../../../src/core/text.ts';
import { solveFlow } from '../../../../src/flow/solve.ts';
import { encodeMeshFolder, type MeshFolderInput } from '../../../../src/formats/mesh/mesh-folder.ts';
import { encodeBinaryStl } from '../../../../src/formats/mesh/stl.ts';
import { buildLumen } from '../../../../src/mesh/build-lumen.ts';
import { cutField, cutForest, cutResistances } from '../../../../src/mesh/cut-forest.ts';
import { measureLumen } from '../../../../src/mesh/measure-lumen.ts';
import { forkSketch, randomSketch, sketchForest } from '../../../support/lumen-forests.ts';

const forest = sketchForest(forkSketch(40, 30, 0.8, 0.6));
const field = solveFlow(forest, ['supply'], { rootPressures: [8000], viscosity: 3.5e-3, density: 1060 });
const mesh = buildLumen(forest);

function folder(more: Partial<MeshFolderInput> = {}): Map<string, Uint8Array> {
  const files = encodeMeshFolder({ mesh, forest, field, kinds: ['supply'], density: 1060, viscosity: 3.5e-3, ...more });
  return new Map(files.map((file) => [file.name, file.bytes]));
}

function text(files: Map<string, Uint8Array>, name: string): string {
  return decodeText(files.get(name)!);
}

/** Promises that do not hold; drops of both networks are stated only by those who solve both. */
function failures(files: Map<string, Uint8Array>) {
  return checkLumen({
    vtp: files.get('lumen.vtp')!,
    msh: files.get('lumen.msh')!,
    oneSolid: files.get('lumen_one_solid.stl')!,
    surface: files.get('lumen.stl')!,
    boundary: files.get('boundary.csv')!,
    network: files.get('network.csv')!,
    notes: files.get('mesh.json')!,
  }).promises.filter(({ held, note }) => held !== true && note !== 'not checked: no drops are stated');
}

describe('encodeMeshFolder', () => {
  const files = folder();

  it('writes what the checker, which shares no code with it, finds sound', () => {
    expect([...files.keys()].sort()).toEqual([
      'boundary.csv',
      'lumen.msh',
      'lumen.stl',
      'lumen.vtp',
      'lumen_one_solid.stl',
      'mesh.json',
      'network.csv',
    ]);
    expect(failures(files)).toEqual([]);
  });

  it('names a solid a patch, and writes every corner of a vertex alike', () => {
    const stl = text(files, 'lumen.stl');
    const solids = [...stl.matchAll(/^solid (.*)$/gm)].map((match) => match[1]);
    expect(solids).toEqual(['wall', 'inlet_0', 'outlet_1', 'outlet_2']);
    const corners = [...stl.matchAll(/vertex (.*)$/gm)].map((match) => match[1]);
    expect(corners).toHaveLength(mesh.triangle.length);
    expect(new Set(corners).size).toBe(mesh.position.length / 3);
    const single = text(files, 'lumen_one_solid.stl');
    expect([...single.matchAll(/^solid/gm)]).toHaveLength(1);
    expect([...single.matchAll(/vertex/g)]).toHaveLength(mesh.triangle.length);
  });

  it('writes other units to the surface files and says so, and metres to the tables', () => {
    const inches = folder({ unit: 'mm' });
    expect(failures(inches)).toEqual([]);
    expect(text(inches, 'boundary.csv')).toBe(text(files, 'boundary.csv'));
    expect(JSON.parse(text(inches, 'mesh.json')).unit).toBe('mm');
    expect(text(inches, 'lumen.msh')).toContain('unit of length mm');
    expect(text(inches, 'lumen.vtp').includes('length_unit')).toBe(true);
    const x = (files: Map<string, Uint8Array>) => Number(/vertex (\S+)/.exec(text(files, 'lumen.stl'))![1]);
    expect(x(inches) / x(files)).toBeCloseTo(1000, 9);
  });

  it('heads the tables with the documented columns', () => {
    expect(text(files, 'boundary.csv').split('\n')[0]).toBe(
      'patch,type,radius_m,cx,cy,cz,nx,ny,nz,flow_m3_s,pressure_Pa,mean_velocity_m_s,reynolds,resistance_Pa_s_m3,' +
        'windkessel_r1,windkessel_r2,windkessel_c,tree,vessel',
    );
    expect(text(files, 'network.csv').split('\n')[0]).toBe(
      'segment,from,to,x0,y0,z0,x1,y1,z1,r0_m,r1_m,length_m,flow_m3_s,p0_Pa,p1_Pa',
    );
  });

  it('writes no negative zero to the tables', () => {
    // The trunk lies along x, and its inlet's normal is (−1, −0, −0).
    expect(Object.is(mesh.patches[1]!.normal[1], -0)).toBe(true);
    expect(text(files, 'boundary.csv')).not.toMatch(/(^|,)-0(,|$)/m);
    expect(text(files, 'network.csv')).not.toMatch(/(^|,)-0(,|$)/m);
    expect(text(files, 'boundary.csv').split('\n')[1]!.split(',').slice(6, 9)).toEqual(['-1', '0', '0']);
  });

  it('writes MSH 2.2 with a physical name a patch', () => {
    const lines = text(files, 'lumen.msh').split('\n');
    expect(lines.slice(0, 3)).toEqual(['$MeshFormat', '2.2 0 8', '$EndMeshFormat']);
    const names = lines.indexOf('$PhysicalNames');
    expect(lines.slice(names + 1, names + 6)).toEqual([
      '4',
      '2 1 "wall"',
      '2 2 "inlet_0"',
      '2 3 "outlet_1"',
      '2 4 "outlet_2"',
    ]);
    const elements = lines.slice(lines.indexOf('$Elements') + 2, lines.indexOf('$EndElements'));
    expect(elements).toHaveLength(mesh.triangle.length / 3);
    const tags = new Map<string, number>();
    for (const line of elements) {
      const words = line.split(' ');
      expect(words).toHaveLength(8);
      tags.set(words[3]!, (tags.get(words[3]!) ?? 0) + 1);
    }
    expect(tags.get('2')).toBe(mesh.patch.filter((patch) => patch === 1).length);
  });

  it('notes figures, limits and a point inside', () => {
    const notes = JSON.parse(text(files, 'mesh.json'));
    const figures = measureLumen(mesh);
    expect(notes.counts.triangles).toBe(figures.triangles);
    expect(notes.quality).toMatchObject({ open_edges: 0, euler_characteristic: 2, volume_m3: figures.volume });
    expect(notes.patches).toEqual(['wall', 'inlet_0', 'outlet_1', 'outlet_2']);
    expect(notes.density_kg_m3).toBe(1060);
    expect(notes.limits.length).toBeGreaterThan(3);
    expect(notes.problems).toEqual([]);
    expect(notes.cut_off).toBeNull();
    // Halfway along the trunk, on its axis.
    expect(notes.inside_point_m[0]).toBeCloseTo(forest.position[0]! / 2, 15);
    expect(notes.inside_point_m.slice(1)).toEqual([0, 0]);
  });

  it('writes binary STL with the patch in the attribute word', () => {
    const bytes = encodeBinaryStl(mesh, 'm');
    const faces = mesh.triangle.length / 3;
    expect(bytes.length).toBe(84 + 50 * faces);
    const view = new DataView(bytes.buffer);
    expect(view.getUint32(80, true)).toBe(faces);
    expect(decodeText(bytes.subarray(0, 5))).not.toBe('solid');
    const swapped = new Map(files).set('lumen.stl', bytes);
    expect(failures(swapped)).toEqual([]);
  });
});

it('writes the folder of a part of a tree', () => {
  const whole = sketchForest(randomSketch('part', { vessels: 40, leastRatio: 0.4 }));
  const solved = solveFlow(whole, ['supply'], { rootPressures: [8000], viscosity: 3.5e-3, density: 1060 });
  const cut = cutForest(whole, { keepOrder: 2 });
  const left = cutField(cut, solved);
  const part = buildLumen(cut.forest, { vesselNumbers: cut.vesselNumbers });
  expect(part.problems).toEqual([]);
  const files = folder({
    mesh: part,
    forest: cut.forest,
    field: left,
    cut: {
      notes: { keepAbove: null, keepOrder: 2, removed: cut.removed },
      source: cut.source,
      vesselNumbers: cut.vesselNumbers,
      resistances: cutResistances(cut, solved, left),
    },
  });
  expect(failures(files)).toEqual([]);
  const notes = JSON.parse(text(files, 'mesh.json'));
  expect(notes.cut_off.vessels).toBe(cut.removed);
  expect(notes.cut_off.patches).toHaveLength(cut.cuts.length);
  const rows = text(files, 'boundary.csv')
    .trim()
    .split('\n')
    .slice(1)
    .map((line) => line.split(','));
  const cutNames = new Set(notes.cut_off.patches);
  for (const row of rows) {
    if (row[1] === 'inlet') expect(row[13]).toBe('');
    else expect(Number(row[13]) > 0).toBe(cutNames.has(row[0]));
  }
});
