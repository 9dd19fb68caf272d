import { TextWriter } from '../text/writer.ts';
import { type MeshUnit, positionsIn } from './length-unit.ts';
import { type NamedTriangles, trianglesByPatch } from './mesh-surface.ts';

/** Type of a triangle of three nodes. */
const TRIANGLE = 2;

/**
 * A lumen surface as MSH 4.1 text: a discrete surface and a physical surface with its name a patch, which have the same
 * tag. A node stands with the first patch that uses it; node and element tags count vertices and triangles from 1, as in
 * the MSH 2.2 file.
 *
 * Source: Gmsh manual, MSH 4.1: `$Entities` lists tag, bounds, physical tags and bounding curves of each surface;
 * `$Nodes` and `$Elements` stand in blocks of an entity each, with counts and least and greatest tags at their head.
 */
export function encodeLumenMsh4(surface: NamedTriangles, unit: MeshUnit): Uint8Array {
  const position = positionsIn(surface.position, unit, surface.unit);
  const { triangle, patches } = surface;
  const vertices = position.length / 3;
  const faces = triangle.length / 3;
  const triangles = trianglesByPatch(surface);
  const owner = firstPatches(surface, vertices);
  const nodes = trianglesByPatch({ patch: owner, patches });
  const out = new TextWriter();
  out.add('$MeshFormat\n4.1 0 8\n$EndMeshFormat\n');
  out.add(`$Comments\nlumen surface, unit of length ${unit}\n$EndComments\n`);
  out.add(`$PhysicalNames\n${patches.length}\n`);
  patches.forEach(({ name }, p) => {
    out.add(`2 ${p + 1} "${name}"\n`);
  });
  out.add(`$EndPhysicalNames\n$Entities\n0 0 ${patches.length} 0\n`);
  for (let p = 0; p < patches.length; p++) {
    const { low, high } = boundsOf(position, triangle, triangles.list, triangles.start[p]!, triangles.start[p + 1]!);
    out.add(`${p + 1} ${low.join(' ')} ${high.join(' ')} 1 ${p + 1} 0\n`);
  }
  out.add(`$EndEntities\n$Nodes\n${blocksOf(nodes.start)} ${vertices} 1 ${vertices}\n`);
  for (let p = 0; p < patches.length; p++) {
    const [from, to] = [nodes.start[p]!, nodes.start[p + 1]!];
    if (from === to) continue;
    out.add(`2 ${p + 1} 0 ${to - from}\n`);
    for (let i = from; i < to; i++) out.add(`${nodes.list[i]! + 1}\n`);
    for (let i = from; i < to; i++) {
      const at = 3 * nodes.list[i]!;
      out.add(`${position[at]} ${position[at + 1]} ${position[at + 2]}\n`);
    }
  }
  out.add(`$EndNodes\n$Elements\n${blocksOf(triangles.start)} ${faces} 1 ${faces}\n`);
  for (let p = 0; p < patches.length; p++) {
    const [from, to] = [triangles.start[p]!, triangles.start[p + 1]!];
    if (from === to) continue;
    out.add(`2 ${p + 1} ${TRIANGLE} ${to - from}\n`);
    for (let i = from; i < to; i++) {
      const t = triangles.list[i]!;
      out.add(`${t + 1} ${triangle[3 * t]! + 1} ${triangle[3 * t + 1]! + 1} ${triangle[3 * t + 2]! + 1}\n`);
    }
  }
  out.add('$EndElements\n');
  return out.bytes();
}

/** (v) the first patch that uses each vertex; 0 of one that none uses. */
function firstPatches({ triangle, patch }: NamedTriangles, vertices: number): Int32Array {
  const first = new Int32Array(vertices).fill(-1);
  for (let c = 0; c < triangle.length; c++) {
    const v = triangle[c]!;
    const p = patch[Math.floor(c / 3)]!;
    if (first[v]! < 0 || p < first[v]!) first[v] = p;
  }
  return first.map((p) => (p < 0 ? 0 : p));
}

/** Patches that have something in a list. */
function blocksOf(start: Int32Array): number {
  let blocks = 0;
  for (let p = 1; p < start.length; p++) if (start[p]! > start[p - 1]!) blocks++;
  return blocks;
}

/** Least and greatest coordinates of the triangles of a stretch of a list; zeros of none. */
function boundsOf(
  position: Float64Array,
  triangle: Int32Array,
  list: Int32Array,
  from: number,
  to: number,
): { readonly low: number[]; readonly high: number[] } {
  if (from === to) return { low: [0, 0, 0], high: [0, 0, 0] };
  const low = [Infinity, Infinity, Infinity];
  const high = [-Infinity, -Infinity, -Infinity];
  for (let i = 3 * from; i < 3 * to; i++) {
    const v = triangle[3 * list[Math.floor(i / 3)]! + (i % 3)]!;
    for (let k = 0; k < 3; k++) {
      const x = position[3 * v + k]!;
      if (x < low[k]!) low[k] = x;
      if (x > high[k]!) high[k] = x;
    }
  }
  return { low, high };
}
