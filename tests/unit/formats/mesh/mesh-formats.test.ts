import { afterEach, describe, expect, it } from 'vitest';
import { solveFlow } from '../../../../src/flow/solve.ts';
import { lumenFile, MESH_FORMATS } from '../../../../src/formats/mesh/mesh-formats.ts';
import { type MeshSurface, surfaceOfLumen } from '../../../../src/formats/mesh/mesh-surface.ts';
import { decodeSurface } from '../../../../src/formats/surface/surface-formats.ts';
import { buildLumen } from '../../../../src/mesh/build-lumen.ts';
import { forkSketch, sketchForest, straightSketch } from '../../../support/lumen-forests.ts';
import {
  type ReadSurface,
  readGlb,
  readMsh,
  readObj,
  readPly,
  readStl,
  readThreeMf,
  readVtk,
} from '../../../support/mesh-readers.ts';

/** A tetrahedron whose numbers have no short decimals, all axes distinct, its patches not in order. */
const odd: MeshSurface = {
  position: Float64Array.of(1 / 3, -1e-6, 2 / 7, 1 + 1 / 3, 1e-7, 2 / 7, 1 / 3, Math.SQRT2, 1 / 7, 0.5, 0.1, 3.3e-3),
  unit: 'm',
  triangle: Int32Array.of(0, 1, 3, 0, 2, 1, 1, 2, 3, 0, 3, 2),
  patch: Int32Array.of(1, 0, 2, 0),
  patches: [{ name: 'wall' }, { name: 'inlet_a' }, { name: 'outlet_7' }],
  vessel: Int32Array.of(5, 0, 7, 123_456),
  pressure: Float64Array.of(8000, 1 / 3, 100, 2000.5),
  wallShear: Float64Array.of(1, 2, 3, 4 / 3),
};

/** Two trees apart. */
function lumen(unit: 'm' | 'mm' | 'um'): MeshSurface {
  const away = straightSketch(4e-4, 6e-3).map(([p, x, y, z, r]) => [p, x, y + 0.02, z, r] as const);
  const forest = sketchForest(forkSketch(40, 30, 0.8, 0.6), away);
  const options = { rootPressures: [8000, 7000], viscosity: 3.5e-3, density: 1060 };
  return surfaceOfLumen(buildLumen(forest), forest, solveFlow(forest, ['supply', 'supply'], options), unit);
}

const ZOO: readonly (readonly [string, MeshSurface])[] = [
  ['a tetrahedron', odd],
  ['the same in millimetres', { ...odd, unit: 'mm' }],
  ['two trees in metres', lumen('m')],
  ['two trees in millimetres', lumen('mm')],
  ['two trees in micrometres', lumen('um')],
];

const READERS: Record<string, (bytes: Uint8Array) => ReadSurface> = {
  stl: readStl,
  vtp: readVtk,
  ply: readPly,
  obj: readObj,
  glb: readGlb,
  '3mf': readThreeMf,
  msh4: readMsh,
  msh: readMsh,
  vtu: readVtk,
};
/** Formats whose triangles stand in the surface's own order; in the others patch follows patch. */
const IN_ORDER = ['vtp', 'ply', '3mf', 'msh', 'vtu'];
const METRES = { m: 1, mm: 1e-3, um: 1e-6 };

describe.each(ZOO)('%s', (_, surface) => {
  it.each(MESH_FORMATS.map((format) => [format.id, format] as const))('reads back from %s', (id, format) => {
    const before = structuredClone(surface);
    const bytes = format.encode(surface);
    expect(surface).toEqual(before);
    const read = READERS[id]!(bytes);
    const faces = surface.patch.length;
    const order = Array.from({ length: faces }, (_, t) => t);
    if (!IN_ORDER.includes(id)) order.sort((s, t) => surface.patch[s]! - surface.patch[t]! || s - t);
    expect(read.corners).toHaveLength(faces);
    // Of the file's unit over the surface's: 1, a whole number, or its inverse. Scaling rounds once or twice.
    const scale = METRES[surface.unit] / METRES[format.unitOf(surface.unit)];
    const bound = id === 'glb' ? 2 ** -24 : scale === 1 ? 0 : 2 ** -51;
    let worst = 0;
    order.forEach((t, i) => {
      for (let k = 0; k < 9; k++) {
        const wanted = scale * surface.position[3 * surface.triangle[3 * t + Math.floor(k / 3)]! + (k % 3)]!;
        const off = Math.abs(read.corners[i]![k]! - wanted);
        if (off > 0) worst = Math.max(worst, off / Math.abs(wanted));
      }
    });
    expect(worst).toBeLessThanOrEqual(bound);
    const drops: readonly string[] = format.drops;
    const patches = order.map((t) => surface.patches[surface.patch[t]!]!.name);
    expect(read.patch).toEqual(drops.includes('patches') ? null : patches);
    expect(read.vessel).toEqual(drops.includes('vessels') ? null : order.map((t) => surface.vessel[t]!));
    if (id === '3mf') expect(read.unit).toBe({ m: 'millimeter', mm: 'millimeter', um: 'micron' }[surface.unit]);
    else if (id === 'glb') expect(format.unitOf(surface.unit)).toBe('m');
    else expect(read.unit).toBe(drops.includes('unit of length') ? null : surface.unit);
    if (!['stl', 'glb'].includes(id)) expect(read.vertices).toBe(surface.position.length / 3);
  });

  it.each(['.stl', '.ply', '.obj'])('is read by the reader of tissue surfaces from %s', (ending) => {
    const format = MESH_FORMATS.find((one) => one.ending === ending)!;
    const read = decodeSurface(format.encode(surface), `lumen${ending}`);
    expect(read.position).toHaveLength(surface.position.length);
    // It numbers corners in the order of their first use, which is that of the faces.
    const corners = Array.from(read.triangle, (v) => [...read.position.subarray(3 * v, 3 * v + 3)]);
    expect(corners.flat()).toEqual(READERS[format.id]!(format.encode(surface)).corners.flat());
  });
});

describe('the table', () => {
  it('lists longer endings before shorter ones that they end in', () => {
    const endings = MESH_FORMATS.map(({ ending }) => ending);
    endings.forEach((ending, i) => {
      expect(endings.findIndex((one) => ending.endsWith(one))).toBe(i);
    });
    expect(new Set(MESH_FORMATS.map(({ id }) => id)).size).toBe(MESH_FORMATS.length);
    expect(MESH_FORMATS.map(lumenFile)).toContain('lumen_4.msh');
  });

  it('lets a format read back only where that gives all of the surface', () => {
    const readers = MESH_FORMATS.filter(({ decode }) => decode !== undefined);
    expect(readers.map(({ id }) => id)).toEqual(['vtp']);
    for (const { encode, decode } of readers) expect(decode!(encode(odd), 'odd')).toEqual(odd);
  });

  it('knows its own files by their heads, and no other', () => {
    const heads = MESH_FORMATS.map((format) => String.fromCharCode(...format.encode(odd).subarray(0, 4096)));
    MESH_FORMATS.forEach((format, i) => {
      expect(heads.map((head) => format.owns(head))).toEqual(heads.map((_, k) => k === i));
    });
  });
});

describe('the same bytes', () => {
  const zone = process.env.TZ;
  afterEach(() => {
    if (zone === undefined) delete process.env.TZ;
    else process.env.TZ = zone;
  });

  it.each(MESH_FORMATS.map((format) => [format.id, format] as const))('%s, wherever the clock is set', (_, format) => {
    process.env.TZ = 'Pacific/Kiritimati';
    const here = format.encode(odd);
    process.env.TZ = 'America/New_York';
    expect(new Date(0).getHours()).toBe(19);
    expect(format.encode(odd)).toEqual(here);
  });
});
