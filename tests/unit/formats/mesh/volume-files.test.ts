import { describe, expect, it } from 'vitest';
import { decodeText } from '../../../../src/core/text.ts';
import { encodeVolumeMsh } from '../../../../src/formats/mesh/volume-msh.ts';
import { encodeVolumeVtu } from '../../../../src/formats/mesh/volume-vtu.ts';
import { buildLumen } from '../../../../src/mesh/build-lumen.ts';
import { buildVolume } from '../../../../src/volume/build-volume.ts';
import { sketchForest, straightSketch } from '../../../support/lumen-forests.ts';

const forest = sketchForest(straightSketch(1e-3, 5e-3));
const volume = buildVolume(buildLumen(forest, { around: 8 }), forest, { layers: 2 });

describe('encodeVolumeMsh', () => {
  const lines = decodeText(encodeVolumeMsh(volume, 'mm')).split('\n');
  const elements = lines
    .slice(lines.indexOf('$Elements') + 2, lines.indexOf('$EndElements'))
    .map((line) => line.split(' ').map(Number));

  it('names a physical surface a patch and the volume', () => {
    const at = lines.indexOf('$PhysicalNames');
    expect(lines.slice(at + 1, at + 6)).toEqual(['4', '2 1 "wall"', '2 2 "inlet_0"', '2 3 "outlet_0"', '3 4 "lumen"']);
  });

  it('writes points in the unit asked for and every face and cell', () => {
    const at = lines.indexOf('$Nodes');
    expect(Number(lines[at + 1])).toBe(volume.row.length);
    const [number, x] = lines[at + 2]!.split(' ').map(Number);
    expect(number).toBe(1);
    expect(x).toBeCloseTo(1e3 * volume.position[0]!, 9);
    expect(elements.length).toBe(volume.patchOfTriangle.length + volume.patchOfQuad.length + volume.vessel.length);
    // Element types of the Gmsh manual and their numbers of corners.
    const corners = new Map([
      [2, 3],
      [3, 4],
      [4, 4],
      [6, 6],
      [7, 5],
    ]);
    for (const [, type, tags, physical, elementary, ...nodes] of elements) {
      expect(tags).toBe(2);
      expect(elementary).toBe(physical);
      expect(nodes.length).toBe(corners.get(type!));
      expect(type! > 3).toBe(physical === 4);
    }
    expect(elements.filter(([, type]) => type === 6).length).toBe(volume.prism.length / 6);
  });
});

describe('encodeVolumeVtu', () => {
  const bytes = encodeVolumeVtu(volume, null, 'm');
  // Offsets count from the byte after the underscore.
  const head = decodeText(bytes.slice(0, 4000));
  const start = head.indexOf('\n   _') + 5;
  const read = (name: string): DataView => {
    const offset = Number(new RegExp(`Name="${name}"[^>]*offset="(\\d+)"`).exec(head)![1]);
    const size = Number(new DataView(bytes.buffer, bytes.byteOffset + start + offset, 8).getBigUint64(0, true));
    return new DataView(bytes.buffer, bytes.byteOffset + start + offset + 8, size);
  };

  it('writes cells by VTK types, wedges with the first triangle run the other way', () => {
    const types = new Uint8Array(read('types').buffer, read('types').byteOffset, read('types').byteLength);
    expect([10, 14, 13].map((type) => types.filter((one) => one === type).length)).toEqual([
      volume.tetrahedron.length / 4,
      volume.pyramid.length / 5,
      volume.prism.length / 6,
    ]);
    const connectivity = read('connectivity');
    const wedges = volume.tetrahedron.length + volume.pyramid.length;
    const wedge = Array.from({ length: 6 }, (_, k) => connectivity.getInt32(4 * (wedges + k), true));
    expect(wedge).toEqual([3, 4, 5, 0, 1, 2].map((k) => volume.prism[k]));
    expect(read('vessel').byteLength).toBe(4 * volume.vessel.length);
  });

  it('gives the same bytes twice', () => {
    expect(encodeVolumeVtu(volume, null, 'm')).toEqual(bytes);
  });
});
