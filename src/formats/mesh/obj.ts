import { TextWriter } from '../text/writer.ts';
import { type MeshUnit, positionsIn } from './length-unit.ts';
import { type NamedTriangles, trianglesByPatch } from './mesh-surface.ts';

/**
 * A lumen surface as Wavefront OBJ: all corners, then the faces of each patch under a `g` of its name. Numbers have all
 * their digits; the unit is a comment.
 *
 * Source: de-facto standard of the 1990s: `v x y z`, `g name`, `f` with corners counted from 1.
 */
export function encodeObj(surface: NamedTriangles, unit: MeshUnit): Uint8Array {
  const position = positionsIn(surface.position, unit, surface.unit);
  const { triangle, patches } = surface;
  const out = new TextWriter();
  out.add(`# lumen surface, unit of length ${unit}\n`);
  for (let v = 0; v < position.length; v += 3) out.add(`v ${position[v]} ${position[v + 1]} ${position[v + 2]}\n`);
  const { start, list } = trianglesByPatch(surface);
  for (let p = 0; p < patches.length; p++) {
    out.add(`g ${patches[p]!.name}\n`);
    for (let i = start[p]!; i < start[p + 1]!; i++) {
      const at = 3 * list[i]!;
      out.add(`f ${triangle[at]! + 1} ${triangle[at + 1]! + 1} ${triangle[at + 2]! + 1}\n`);
    }
  }
  return out.bytes();
}
