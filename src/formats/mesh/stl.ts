import { inputError } from '../../core/errors.ts';
import { TextWriter } from '../text/writer.ts';
import { type MeshUnit, positionsIn } from './length-unit.ts';
import { type NamedTriangles, trianglesByPatch } from './mesh-surface.ts';

/** Triangles above which an STL is written in binary. */
export const BINARY_ABOVE = 5_000_000;

/**
 * A lumen surface as ASCII STL, one named solid a patch, the wall first.
 *
 * Corners are printed with all the digits they have, so that equal corners are equal texts. STL has no place for the
 * unit; mesh.json says it.
 *
 * Source: de-facto standard of 1989, layout confirmed with an independent writer.
 */
export function encodeNamedStl(mesh: NamedTriangles, unit: MeshUnit): Uint8Array {
  const out = new TextWriter();
  const lists = trianglesByPatch(mesh);
  const print = facetPrinter(mesh, unit);
  for (let p = 0; p < mesh.patches.length; p++) {
    const { name } = mesh.patches[p]!;
    out.add(`solid ${name}\n`);
    for (let i = lists.start[p]!; i < lists.start[p + 1]!; i++) out.add(print(lists.list[i]!));
    out.add(`endsolid ${name}\n`);
  }
  return out.bytes();
}

/** The same surface as one ASCII solid, for tools that take no more than one. */
export function encodeSingleStl(mesh: NamedTriangles, unit: MeshUnit, name = 'lumen'): Uint8Array {
  const out = new TextWriter();
  const print = facetPrinter(mesh, unit);
  out.add(`solid ${name}\n`);
  for (let t = 0; t < mesh.triangle.length / 3; t++) out.add(print(t));
  out.add(`endsolid ${name}\n`);
  return out.bytes();
}

/**
 * A lumen surface as binary STL: float32 corners, the patch's number in the attribute word.
 *
 * @throws InputError above 65,536 patches, which the attribute word cannot number
 */
export function encodeBinaryStl(mesh: NamedTriangles, unit: MeshUnit): Uint8Array {
  if (mesh.patches.length > 65_536)
    throw inputError('too-many-patches', 'lumen.stl', `got ${mesh.patches.length} patches, binary STL numbers 65,536`);
  const position = Float32Array.from(positionsIn(mesh.position, unit, mesh.unit));
  const count = mesh.triangle.length / 3;
  const bytes = new Uint8Array(84 + 50 * count);
  const view = new DataView(bytes.buffer);
  const header = `lumen surface, unit ${unit}, attribute word: patch number`;
  for (let i = 0; i < header.length; i++) bytes[i] = header.charCodeAt(i);
  view.setUint32(80, count, true);
  const lists = trianglesByPatch(mesh);
  for (let i = 0; i < count; i++) {
    const t = lists.list[i]!;
    const at = 84 + 50 * i;
    const n = normalOf(mesh, t);
    for (let k = 0; k < 3; k++) view.setFloat32(at + 4 * k, n[k]!, true);
    for (let k = 0; k < 9; k++) {
      const corner = mesh.triangle[3 * t + Math.floor(k / 3)]!;
      view.setFloat32(at + 12 + 4 * k, position[3 * corner + (k % 3)]!, true);
    }
    view.setUint16(at + 48, mesh.patch[t]!, true);
  }
  return bytes;
}

function facetPrinter(mesh: NamedTriangles, unit: MeshUnit): (t: number) => string {
  const position = positionsIn(mesh.position, unit, mesh.unit);
  const corner = new Array<string>(position.length / 3);
  for (let v = 0; v < corner.length; v++)
    corner[v] = `      vertex ${position[3 * v]} ${position[3 * v + 1]} ${position[3 * v + 2]}\n`;
  return (t) => {
    const [x, y, z] = normalOf(mesh, t);
    return (
      `  facet normal ${x.toFixed(7)} ${y.toFixed(7)} ${z.toFixed(7)}\n    outer loop\n` +
      corner[mesh.triangle[3 * t]!]! +
      corner[mesh.triangle[3 * t + 1]!]! +
      corner[mesh.triangle[3 * t + 2]!]! +
      '    endloop\n  endfacet\n'
    );
  };
}

function normalOf(mesh: NamedTriangles, t: number): [number, number, number] {
  const p = mesh.position;
  const a = 3 * mesh.triangle[3 * t]!;
  const b = 3 * mesh.triangle[3 * t + 1]!;
  const c = 3 * mesh.triangle[3 * t + 2]!;
  const ux = p[b]! - p[a]!;
  const uy = p[b + 1]! - p[a + 1]!;
  const uz = p[b + 2]! - p[a + 2]!;
  const vx = p[c]! - p[a]!;
  const vy = p[c + 1]! - p[a + 1]!;
  const vz = p[c + 2]! - p[a + 2]!;
  const nx = uy * vz - uz * vy;
  const ny = uz * vx - ux * vz;
  const nz = ux * vy - uy * vx;
  const scale = 1 / Math.sqrt(nx * nx + ny * ny + nz * nz);
  return [nx * scale, ny * scale, nz * scale];
}
