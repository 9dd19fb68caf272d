import type { LumenVolume } from '../../volume/lumen-volume.ts';
import { TextWriter } from '../text/writer.ts';
import { type MeshUnit, positionsIn } from './length-unit.ts';

/** MSH numbers of element types. */
const TRIANGLE = 2;
const QUADRANGLE = 3;
const TETRAHEDRON = 4;
const PRISM = 6;
const PYRAMID = 7;

/** Physical name of the volume. */
const LUMEN = 'lumen';

/**
 * A volume mesh as MSH 2.2 text: a physical surface with its name a patch, as in `lumen.msh`, and one physical volume,
 * `lumen`, whose tag follows theirs.
 *
 * Source: Gmsh manual (public text quoting it), MSH 2.2: `id type ntags physical elementary nodes…`; corners of a prism: the
 * first three counter-clockwise seen from the last three; of a pyramid: the first four so seen from the fifth.
 */
export function encodeVolumeMsh(volume: LumenVolume, unit: MeshUnit): Uint8Array {
  const out = new TextWriter();
  const position = positionsIn(volume.position, unit);
  const { patches, triangle, quad, patchOfTriangle, patchOfQuad } = volume;
  const inside = patches.length + 1;
  out.add('$MeshFormat\n2.2 0 8\n$EndMeshFormat\n');
  out.add(`$Comments\nlumen volume, unit of length ${unit}\n$EndComments\n`);
  out.add(`$PhysicalNames\n${inside}\n`);
  patches.forEach((patch, i) => {
    out.add(`2 ${i + 1} "${patch.name}"\n`);
  });
  out.add(`3 ${inside} "${LUMEN}"\n`);
  out.add(`$EndPhysicalNames\n$Nodes\n${position.length / 3}\n`);
  for (let v = 0; v < position.length / 3; v++)
    out.add(`${v + 1} ${position[3 * v]} ${position[3 * v + 1]} ${position[3 * v + 2]}\n`);
  out.add(`$EndNodes\n$Elements\n${patchOfTriangle.length + patchOfQuad.length + volume.vessel.length}\n`);
  let element = 0;
  const add = (corners: Int32Array, size: number, type: number, tagOf: (i: number) => number): void => {
    for (let at = 0; at < corners.length; at += size) {
      const tag = tagOf(at / size);
      let line = `${++element} ${type} 2 ${tag} ${tag}`;
      for (let k = 0; k < size; k++) line += ` ${corners[at + k]! + 1}`;
      out.add(`${line}\n`);
    }
  };
  add(triangle, 3, TRIANGLE, (i) => patchOfTriangle[i]! + 1);
  add(quad, 4, QUADRANGLE, (i) => patchOfQuad[i]! + 1);
  add(volume.tetrahedron, 4, TETRAHEDRON, () => inside);
  add(volume.pyramid, 5, PYRAMID, () => inside);
  add(volume.prism, 6, PRISM, () => inside);
  out.add('$EndElements\n');
  return out.bytes();
}
