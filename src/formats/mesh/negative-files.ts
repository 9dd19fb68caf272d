import type { TriangleSurface } from '../../core/surface.ts';
import { decodeText, encodeText } from '../../core/text.ts';
import { fromSi } from '../../core/units.ts';
import type { NamedBytes } from '../format.ts';
import type { MeshUnit } from './length-unit.ts';
import { encodeSingleStl } from './stl.ts';
import { encodeThreeMf } from './three-mf.ts';

export interface NegativeInput {
  readonly surface: TriangleSurface;
  /** m³ of the block, and of the channels in it. */
  readonly block: number;
  readonly channels: number;
  readonly problems: readonly string[];
}

export interface WallInput {
  /** Unit of `negative.stl`. */
  readonly unit: MeshUnit;
  /** m, asked for. */
  readonly leastWall: number;
  /** m between channels that share no junction, and the vessels; infinite and null where there are no two. */
  readonly between: number;
  readonly betweenVessels: readonly [number, number] | null;
  /** m between a channel and the block's surface, and the vessel. */
  readonly outer: number;
  readonly outerVessel: number | null;
}

/** What `mesh.json` tells of a negative. */
export interface NegativeNotes {
  readonly triangles: number;
  readonly block_m3: number;
  readonly channels_m3: number;
  readonly solid_m3: number;
  readonly least_wall_asked_m: number;
  readonly least_wall_between_channels_m: number | null;
  readonly between_vessels: readonly [number, number] | null;
  readonly least_wall_to_surface_m: number | null;
  readonly to_surface_vessel: number | null;
  readonly problems: readonly string[];
}

/** The files of a mesh folder with `negative.stl` and `negative.3mf`, and `mesh.json` telling of them. */
export function addNegativeFiles(
  files: readonly NamedBytes[],
  negative: NegativeInput,
  walls: WallInput,
): { files: NamedBytes[]; notes: NegativeNotes } {
  const { surface, block, channels } = negative;
  const told = (length: number): string => `${Number(fromSi(length, 'um').toPrecision(4))} µm`;
  const problems = [...negative.problems];
  if (walls.between < walls.leastWall) {
    const pair = walls.betweenVessels!.join(' and ');
    problems.push(`the wall between vessels ${pair} is ${told(walls.between)}, wanted ${told(walls.leastWall)}`);
  }
  if (walls.outer < walls.leastWall) {
    problems.push(
      `the wall between vessel ${walls.outerVessel} and the surface is ${told(walls.outer)}, wanted ${told(walls.leastWall)}`,
    );
  }
  const notes: NegativeNotes = {
    triangles: surface.triangle.length / 3,
    block_m3: block,
    channels_m3: channels,
    solid_m3: block - channels,
    least_wall_asked_m: walls.leastWall,
    least_wall_between_channels_m: Number.isFinite(walls.between) ? walls.between : null,
    between_vessels: walls.betweenVessels,
    least_wall_to_surface_m: Number.isFinite(walls.outer) ? walls.outer : null,
    to_surface_vessel: walls.outerVessel,
    problems,
  };
  const patch = new Int32Array(surface.triangle.length / 3);
  const solid = { ...surface, patch, patches: [{ name: 'negative' }] };
  const old = files.find(({ name }) => name === 'mesh.json')!;
  const json = JSON.parse(decodeText(old.bytes)) as { files: unknown[] };
  const dropped = ['unit of length', 'patches', 'vessels', 'pressures', 'wall shear'];
  json.files.push({ name: 'negative.stl', unit: walls.unit, holds_no: dropped });
  json.files.push({ name: 'negative.3mf', unit: walls.unit === 'um' ? 'um' : 'mm', holds_no: dropped.slice(1) });
  const noted = encodeText(`${JSON.stringify({ ...json, negative: notes }, null, 2)}\n`);
  return {
    files: [
      ...files.filter((file) => file !== old),
      { name: 'negative.stl', bytes: encodeSingleStl(solid, walls.unit, 'negative') },
      { name: 'negative.3mf', bytes: encodeThreeMf(solid, walls.unit === 'um' ? 'um' : 'mm', 'negative') },
      { name: 'mesh.json', bytes: noted },
    ],
    notes,
  };
}
