import { COLOUR_BY, type ColourBy, encodeGlb } from './glb.ts';
import type { MeshUnit } from './length-unit.ts';
import { decodeLumenVtp, encodeLumenVtp } from './lumen-vtp.ts';
import type { MeshSurface } from './mesh-surface.ts';
import { encodeLumenMsh } from './msh.ts';
import { encodeLumenMsh4 } from './msh4.ts';
import { encodeObj } from './obj.ts';
import { encodePly } from './ply.ts';
import { BINARY_ABOVE, encodeBinaryStl, encodeNamedStl } from './stl.ts';
import { encodeThreeMf } from './three-mf.ts';
import { encodeLumenVtu } from './vtu.ts';

/** What of a MeshSurface a format may not hold. */
export type MeshDrop = 'unit of length' | 'patches' | 'vessels' | 'pressures' | 'wall shear' | 'digits beyond float32';

export interface MeshEncodeOptions {
  /** What colours tell, in a format that has them; patches where left out. */
  readonly colourBy?: ColourBy | undefined;
}

export interface MeshFormat {
  /** The word that asks for it. */
  readonly id: string;
  /** One line of what it is, for help and README. */
  readonly title: string;
  /** What names of its files end in; longer endings go before shorter ones. */
  readonly ending: string;
  /** The unit written, in words. */
  readonly units: string;
  readonly drops: readonly MeshDrop[];
  /** Whether a mesh folder has it without being asked. */
  readonly always: boolean;
  /** What its colours may tell, the usual one first; none where it has no colours. */
  readonly colours: readonly ColourBy[];
  /** Unit of length of a file made of a surface in a unit. */
  unitOf(unit: MeshUnit): MeshUnit;
  /** Whether a file that begins so is one that this format wrote; looks at 4096 bytes, each a character. */
  owns(head: string): boolean;
  /** @throws InputError where the format cannot hold so much, or what is asked for is not known */
  encode(surface: MeshSurface, options?: MeshEncodeOptions): Uint8Array;
  /**
   * Reads back all that was written; formats that hold all of a surface may have it.
   *
   * @param name file, for faults
   * @throws InputError naming every place that is broken
   */
  readonly decode?: ((bytes: Uint8Array, name: string) => MeshSurface) | undefined;
}

const OWN_UNIT = 'that of the mesh';
const same = (unit: MeshUnit): MeshUnit => unit;
/** Printers count in millimetres; what is in micrometres stays so. */
const printed = (unit: MeshUnit): MeshUnit => (unit === 'um' ? 'um' : 'mm');

/** Every format a lumen surface can be written to; help and tests read this table. */
export const MESH_FORMATS: readonly MeshFormat[] = [
  {
    id: 'stl',
    title: `STL, ASCII with a named solid a patch; above ${BINARY_ABOVE / 1e6} million triangles binary, float32, patch number in the attribute word`,
    ending: '.stl',
    units: `${OWN_UNIT}, which the ASCII file does not say`,
    drops: ['unit of length', 'vessels', 'pressures', 'wall shear'],
    always: true,
    colours: [],
    unitOf: same,
    owns: (head) => head.startsWith('solid ') || head.startsWith('lumen surface, unit '),
    encode: (surface) =>
      surface.patch.length > BINARY_ABOVE
        ? encodeBinaryStl(surface, surface.unit)
        : encodeNamedStl(surface, surface.unit),
  },
  {
    id: 'vtp',
    title: 'VTK XML PolyData: patch and vessel of every triangle, pressure and wall shear of every corner',
    ending: '.vtp',
    units: `${OWN_UNIT}, in field array length_unit; pressures and shear in Pa`,
    drops: [],
    always: true,
    colours: [],
    unitOf: same,
    owns: (head) => head.includes('type="PolyData"') && head.includes('Name="patch_names"'),
    encode: encodeLumenVtp,
    decode: decodeLumenVtp,
  },
  {
    id: 'ply',
    title: 'PLY, binary, little-endian, float64: patch and vessel of every triangle, patch names in comments',
    ending: '.ply',
    units: `${OWN_UNIT}, in a comment`,
    drops: ['pressures', 'wall shear'],
    always: false,
    colours: [],
    unitOf: same,
    owns: (head) => head.startsWith('ply\n') && head.includes('\ncomment lumen surface'),
    encode: (surface) => encodePly(surface, surface.unit),
  },
  {
    id: 'obj',
    title: 'Wavefront OBJ: a group a patch',
    ending: '.obj',
    units: `${OWN_UNIT}, in a comment`,
    drops: ['vessels', 'pressures', 'wall shear'],
    always: false,
    colours: [],
    unitOf: same,
    owns: (head) => head.startsWith('# lumen surface'),
    encode: (surface) => encodeObj(surface, surface.unit),
  },
  {
    id: 'glb',
    title: 'binary glTF 2.0: a primitive and a material a patch, colours by patch or by a quantity',
    ending: '.glb',
    units: 'metres always, as its standard has it',
    drops: ['vessels', 'pressures', 'wall shear', 'digits beyond float32'],
    always: false,
    colours: COLOUR_BY,
    unitOf: () => 'm',
    owns: (head) => head.startsWith('glTF') && head.includes('"generator":"vesselwright"'),
    encode: (surface, options) => encodeGlb(surface, options?.colourBy),
  },
  {
    id: '3mf',
    title: '3MF for printing: one object',
    ending: '.3mf',
    units: 'millimetres, or micrometres where the mesh is in them; stated',
    drops: ['patches', 'vessels', 'pressures', 'wall shear'],
    always: false,
    colours: [],
    unitOf: printed,
    // The archive's fixed time, noon, as it stands at byte 10.
    owns: (head) => head.startsWith('PK') && head.startsWith('\u0000\u0060\u0021\u0000', 10),
    encode: (surface) => encodeThreeMf(surface, printed(surface.unit)),
  },
  {
    id: 'msh4',
    title: 'MSH 4.1, ASCII: a discrete and a physical surface a patch, named',
    ending: '_4.msh',
    units: `${OWN_UNIT}, in a comment`,
    drops: ['vessels', 'pressures', 'wall shear'],
    always: false,
    colours: [],
    unitOf: same,
    owns: (head) => head.startsWith('$MeshFormat\n4.1 0 8\n') && head.includes('\nlumen surface'),
    encode: (surface) => encodeLumenMsh4(surface, surface.unit),
  },
  {
    id: 'msh',
    title: 'MSH 2.2, ASCII: a physical surface a patch, named',
    ending: '.msh',
    units: `${OWN_UNIT}, in a comment`,
    drops: ['vessels', 'pressures', 'wall shear'],
    always: true,
    colours: [],
    unitOf: same,
    owns: (head) => head.startsWith('$MeshFormat\n2.2 0 8\n') && head.includes('\nlumen surface'),
    encode: (surface) => encodeLumenMsh(surface, surface.unit),
  },
  {
    id: 'vtu',
    title: 'VTK XML UnstructuredGrid of triangles, otherwise as .vtp; texts as UInt8 codes, patch names by number',
    ending: '.vtu',
    units: `${OWN_UNIT}, in field array length_unit; pressures and shear in Pa`,
    drops: [],
    always: false,
    colours: [],
    unitOf: same,
    owns: (head) => head.includes('type="UnstructuredGrid"') && head.includes('Name="patch_names"'),
    encode: encodeLumenVtu,
  },
];

/** Name of a format's file in a mesh folder. */
export function lumenFile(format: Pick<MeshFormat, 'ending'>): string {
  return `lumen${format.ending}`;
}
