import { describe, expect, it } from 'vitest';
import { checkLumen } from '../../../../src/check/lumen/check-lumen.ts';
import { decodeText } from '../../../../src/core/text.ts';
import { solveFlow } from '../../../../src/flow/solve.ts';
import type { MeshUnit } from '../../../../src/formats/mesh/length-unit.ts';
import { encodeMeshFolder } from '../../../../src/formats/mesh/mesh-folder.ts';
import { addVolumeFiles } from '../../../../src/formats/mesh/volume-files.ts';
import { encodeVolumeVtu } from '../../../../src/formats/mesh/volume-vtu.ts';
import { buildLumen } from '../../../../src/mesh/build-lumen.ts';
import { buildVolume } from '../../../../src/volume/build-volume.ts';
import type { LumenVolume } from '../../../../src/volume/lumen-volume.ts';
import { solveVolumeFlow, type VolumeFlow } from '../../../../src/volume/volume-flow.ts';
import { forkSketch, type Sketch, sketchForest, straightSketch } from '../../../support/lumen-forests.ts';

function prepare(
  sketches: readonly Sketch[],
  kinds: readonly ('supply' | 'drain')[],
  around: number,
  unit: MeshUnit = 'm',
) {
  const forest = sketchForest(...sketches);
  const field = solveFlow(forest, kinds, {
    rootPressures: kinds.map(() => 8000),
    viscosity: 3.5e-3,
    density: 1060,
  });
  const mesh = buildLumen(forest, { kinds, around });
  const volume = buildVolume(mesh, forest, { layers: 2 });
  const flow = solveVolumeFlow(volume, forest, field, kinds);
  const folder = encodeMeshFolder({ mesh, forest, field, kinds, density: 1060, viscosity: 3.5e-3, unit });
  return { files: addVolumeFiles(folder, volume, flow, unit).files, volume, flow };
}

/** Which promises of the volume hold; null where one was not looked at. */
function heldOf(files: ReturnType<typeof prepare>['files'], vtu?: Uint8Array): Record<string, boolean | null> {
  const bytes = (name: string) => files.find((file) => file.name === name)!.bytes;
  const { promises } = checkLumen({
    surface: bytes('lumen.stl'),
    boundary: bytes('boundary.csv'),
    network: bytes('network.csv'),
    notes: bytes('mesh.json'),
    volume: vtu ?? bytes('lumen_volume.vtu'),
  });
  return Object.fromEntries(
    promises.filter(({ id }) => id.startsWith('volume-')).map(({ id, held }) => [id.slice(7), held]),
  );
}

const HELD = { cells: true, fit: true, boundary: true, whole: true, still: true, caps: true, sections: true };

describe('the check of a volume mesh', () => {
  const tube = prepare([straightSketch(1e-3, 8e-3)], ['supply'], 24);
  const spoilt = (mesh: Partial<LumenVolume>, flow: Partial<VolumeFlow> = {}) =>
    heldOf(tube.files, encodeVolumeVtu({ ...tube.volume, ...mesh }, { ...tube.flow, ...flow }, 'm'));

  it('holds for two trees, in millimetres too', () => {
    const apart = straightSketch(1e-3, 8e-3).map(([p, x, y, z, r]) => [p, x, y + 0.03, z, r] as const);
    const two = prepare([forkSketch(40, 35, 0.8, 0.7), apart], ['supply', 'drain'], 12, 'mm');
    expect(heldOf(two.files)).toEqual(HELD);
  });

  it('holds for a tube, and tells of it in mesh.json', () => {
    expect(heldOf(tube.files)).toEqual(HELD);
    const notes = JSON.parse(decodeText(tube.files.find(({ name }) => name === 'mesh.json')!.bytes));
    expect(notes.volume).toMatchObject({ layers: 2, layer_growth: 1.2, cells: tube.volume.vessel.length });
    expect(notes.files.map(({ name }: { name: string }) => name)).toEqual(
      expect.arrayContaining(['lumen_volume.vtu', 'lumen_volume.msh']),
    );
  });

  it('sees a cell turned over, and one that is missing', () => {
    const turned = tube.volume.prism.slice();
    [turned[0], turned[1], turned[3], turned[4]] = [turned[1]!, turned[0]!, turned[4]!, turned[3]!];
    expect(spoilt({ prism: turned })).toMatchObject({ cells: false, fit: false });
    const { tetrahedron, vessel } = tube.volume;
    const fewer = spoilt({ tetrahedron: tetrahedron.slice(4), vessel: vessel.slice(1) });
    expect(fewer).toMatchObject({ cells: true, fit: true, boundary: false, whole: false });
  });

  it('sees a cell folded by a point that was moved, and a wall that is not the surface’s', () => {
    const position = tube.volume.position.slice();
    const inner = 3 * (tube.volume.position.length / 3 - 5);
    position[inner + 1]! += 0.6e-3;
    expect(spoilt({ position })).toMatchObject({ cells: false, boundary: true });
    const bulged = tube.volume.position.slice();
    bulged[3 * 100 + 1]! *= 1.001;
    expect(spoilt({ position: bulged })).toMatchObject({ cells: true, fit: true, boundary: false });
  });

  it('sees flow at the wall, too much of it, and too little along the way', () => {
    const slipping = tube.flow.velocity.slice();
    slipping[3 * 50] = 1e-9;
    expect(spoilt({}, { velocity: slipping })).toEqual({ ...HELD, still: false });
    const faster = tube.flow.velocity.map((u) => 1.006 * u);
    expect(spoilt({}, { velocity: faster })).toEqual({ ...HELD, caps: false, sections: false });
    const { position } = tube.volume;
    const halting = tube.flow.velocity.map((u, i) => {
      const x = position[3 * Math.floor(i / 3)]!;
      return x > 2e-3 && x < 6e-3 ? 0.99 * u : u;
    });
    expect(spoilt({}, { velocity: halting })).toEqual({ ...HELD, sections: false });
  });

  it('says so where the file is cut short or of another unit', () => {
    const whole = tube.files.find(({ name }) => name === 'lumen_volume.vtu')!.bytes;
    const others = Object.fromEntries(Object.keys(HELD).map((id) => [id, null]));
    expect(heldOf(tube.files, whole.slice(0, whole.length - 100))).toEqual({ ...others, cells: false });
    expect(heldOf(tube.files, encodeVolumeVtu(tube.volume, tube.flow, 'mm')).boundary).toBe(false);
    expect(heldOf(tube.files, encodeVolumeVtu(tube.volume, null, 'm'))).toEqual({ ...others, cells: false });
  });
});
