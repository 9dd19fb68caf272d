import { decodeText, encodeText } from '../../core/text.ts';
import type { LumenVolume } from '../../volume/lumen-volume.ts';
import { measureVolume } from '../../volume/measure-volume.ts';
import type { VolumeFlow } from '../../volume/volume-flow.ts';
import type { NamedBytes } from '../format.ts';
import type { MeshUnit } from './length-unit.ts';
import { encodeVolumeMsh } from './volume-msh.ts';
import { encodeVolumeVtu } from './volume-vtu.ts';

/** What `mesh.json` tells of a volume mesh. */
export interface VolumeNotes {
  readonly layers: number;
  readonly layer_growth: number;
  /** Thickness of each layer over the vessel's radius, from the wall inwards. */
  readonly layer_thickness: readonly number[];
  readonly points: number;
  readonly cells: number;
  readonly tetrahedra: number;
  readonly pyramids: number;
  readonly prisms: number;
  readonly volume_m3: number;
  /** 1 for a cell whose edges are all of one length; cells by tenths of it. */
  readonly least_scaled_jacobian: number;
  readonly scaled_jacobian_histogram: readonly number[];
  readonly velocity: string;
  /** Of the velocity in the nodes, see `velocity`. */
  readonly divergence: number;
}

const VELOCITY =
  'reconstructed from the network: parabolic in vessels, blended in junctions; taken linear over cells it carries the flow ' +
  'exactly through caps, and on average along vessels; divergence: the largest |∫φ ∇·u| in a junction over the largest ' +
  '∫φ |∇u|, φ the linear hat of a point';

/** The files of a mesh folder with `lumen_volume.vtu` and `lumen_volume.msh`, and `mesh.json` telling of them. */
export function addVolumeFiles(
  files: readonly NamedBytes[],
  volume: LumenVolume,
  flow: VolumeFlow,
  unit: MeshUnit,
): { files: NamedBytes[]; notes: VolumeNotes } {
  const figures = measureVolume(volume);
  const { fraction } = volume.sections.disc;
  const notes: VolumeNotes = {
    layers: volume.layers,
    layer_growth: volume.layerGrowth,
    layer_thickness: Array.from({ length: volume.layers }, (_, l) => fraction[l]! - fraction[l + 1]!),
    points: figures.points,
    cells: figures.cells,
    tetrahedra: figures.tetrahedra,
    pyramids: figures.pyramids,
    prisms: figures.prisms,
    volume_m3: figures.volume,
    least_scaled_jacobian: figures.leastJacobian,
    scaled_jacobian_histogram: figures.histogram,
    velocity: VELOCITY,
    divergence: flow.divergence,
  };
  const old = files.find(({ name }) => name === 'mesh.json')!;
  const json = JSON.parse(decodeText(old.bytes)) as { files: unknown[] };
  json.files.push({ name: 'lumen_volume.vtu', unit, holds_no: ['patches', 'wall shear'] });
  json.files.push({ name: 'lumen_volume.msh', unit, holds_no: ['vessels', 'velocities', 'pressures', 'wall shear'] });
  return {
    files: [
      ...files.filter((file) => file !== old),
      { name: 'lumen_volume.vtu', bytes: encodeVolumeVtu(volume, flow, unit) },
      { name: 'lumen_volume.msh', bytes: encodeVolumeMsh(volume, unit) },
      { name: 'mesh.json', bytes: encodeText(`${JSON.stringify({ ...json, volume: notes }, null, 2)}\n`) },
    ],
    notes,
  };
}
