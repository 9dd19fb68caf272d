import { TextWriter } from '../text/writer.ts';
import { type MeshUnit, positionsIn } from './length-unit.ts';
import type { NamedTriangles } from './mesh-surface.ts';

/**
 * A lumen surface as MSH 2.2 text, a physical surface with its name a patch.
 *
 * Source: Gmsh manual (public text quoting it), MSH 2.2: `id type ntags physical elementary nodes…`, type 2 a triangle.
 */
export function encodeLumenMsh(mesh: NamedTriangles, unit: MeshUnit): Uint8Array {
  const out = new TextWriter();
  const position = positionsIn(mesh.position, unit, mesh.unit);
  out.add('$MeshFormat\n2.2 0 8\n$EndMeshFormat\n');
  out.add(`$Comments\nlumen surface, unit of length ${unit}\n$EndComments\n`);
  out.add(`$PhysicalNames\n${mesh.patches.length}\n`);
  mesh.patches.forEach((patch, i) => {
    out.add(`2 ${i + 1} "${patch.name}"\n`);
  });
  out.add(`$EndPhysicalNames\n$Nodes\n${position.length / 3}\n`);
  for (let v = 0; v < position.length / 3; v++)
    out.add(`${v + 1} ${position[3 * v]} ${position[3 * v + 1]} ${position[3 * v + 2]}\n`);
  const faces = mesh.triangle.length / 3;
  out.add(`$EndNodes\n$Elements\n${faces}\n`);
  for (let t = 0; t < faces; t++) {
    const tag = mesh.patch[t]! + 1;
    const [a, b, c] = [mesh.triangle[3 * t]!, mesh.triangle[3 * t + 1]!, mesh.triangle[3 * t + 2]!];
    out.add(`${t + 1} 2 2 ${tag} ${tag} ${a + 1} ${b + 1} ${c + 1}\n`);
  }
  out.add('$EndElements\n');
  return out.bytes();
}
