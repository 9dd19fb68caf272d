import { TextWriter } from '../text/writer.ts';
import { type MeshUnit, positionsIn } from './length-unit.ts';
import type { MeshSurface, NamedTriangles } from './mesh-surface.ts';

/** Bytes of a face: a count of corners, three corners, patch, vessel. */
const FACE = 1 + 3 * 4 + 2 * 4;

/**
 * A lumen surface as binary PLY, little-endian: float64 corners, and of each face its corners, the number of its patch
 * and of its nearest vessel. The unit and the patches' names by number are comments of the header.
 *
 * Source: G. Turk (1994), the PLY polygon file format: header of `element` and `property` lines, data in that order
 * without gaps.
 */
export function encodePly(surface: NamedTriangles & Pick<MeshSurface, 'vessel'>, unit: MeshUnit): Uint8Array {
  const position = positionsIn(surface.position, unit, surface.unit);
  const { triangle, patch, vessel } = surface;
  const vertices = position.length / 3;
  const faces = triangle.length / 3;
  const text = new TextWriter();
  text.add(`ply\nformat binary_little_endian 1.0\ncomment lumen surface, unit of length ${unit}\n`);
  surface.patches.forEach(({ name }, p) => {
    text.add(`comment patch ${p} ${name}\n`);
  });
  text.add(`element vertex ${vertices}\nproperty double x\nproperty double y\nproperty double z\n`);
  text.add(`element face ${faces}\nproperty list uchar int vertex_indices\nproperty int patch\nproperty int vessel\n`);
  text.add('end_header\n');
  const head = text.bytes();
  const bytes = new Uint8Array(head.length + 8 * position.length + FACE * faces);
  bytes.set(head);
  const view = new DataView(bytes.buffer);
  let at = head.length;
  for (let i = 0; i < position.length; i++, at += 8) view.setFloat64(at, position[i]!, true);
  for (let t = 0; t < faces; t++, at += FACE) {
    bytes[at] = 3;
    for (let k = 0; k < 3; k++) view.setInt32(at + 1 + 4 * k, triangle[3 * t + k]!, true);
    view.setInt32(at + 13, patch[t]!, true);
    view.setInt32(at + 17, vessel[t]!, true);
  }
  return bytes;
}
