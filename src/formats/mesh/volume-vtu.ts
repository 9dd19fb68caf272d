import type { LumenVolume } from '../../volume/lumen-volume.ts';
import type { VolumeFlow } from '../../volume/volume-flow.ts';
import { encodeDataSet, joinPieces, joinTexts } from '../vtk/data-set-writer.ts';
import { type MeshUnit, positionsIn } from './length-unit.ts';

/** VTK's numbers of cell types. */
const TETRAHEDRON = 10;
const WEDGE = 13;
const PYRAMID = 14;

/**
 * A volume mesh as VTK XML UnstructuredGrid: tetrahedra, then pyramids, then wedges.
 *
 * Point arrays `velocity_m_s` (3) and `pressure_Pa`, cell array `vessel` (number of the nearest), field data `length_unit`
 * as UInt8 codes ended by a 0.
 *
 * Source: VTK XML formats and cell types as documented by Kitware. A wedge's first three corners run
 * counter-clockwise seen from outside there, the other way than in MSH files.
 */
export function encodeVolumeVtu(volume: LumenVolume, flow: VolumeFlow | null, unit: MeshUnit): Uint8Array {
  const { tetrahedron, pyramid, prism } = volume;
  const cells = volume.vessel.length;
  const ends = new Int32Array(cells);
  const types = new Uint8Array(cells);
  let cell = 0;
  let end = 0;
  for (const [corners, size, type] of [
    [tetrahedron, 4, TETRAHEDRON],
    [pyramid, 5, PYRAMID],
    [prism, 6, WEDGE],
  ] as const) {
    for (let at = 0; at < corners.length; at += size) {
      end += size;
      ends[cell] = end;
      types[cell++] = type;
    }
  }
  const encoded = encodeDataSet(
    {
      type: 'UnstructuredGrid',
      counts: { NumberOfCells: cells },
      cells: {
        Cells: [
          { name: 'connectivity', values: [tetrahedron, pyramid, wedgesOf(prism)] },
          { name: 'offsets', values: ends },
          { name: 'types', values: types },
        ],
      },
    },
    {
      points: positionsIn(volume.position, unit),
      pointData:
        flow === null
          ? []
          : [
              { name: 'velocity_m_s', values: flow.velocity, components: 3 },
              { name: 'pressure_Pa', values: flow.pressure },
            ],
      cellData: [{ name: 'vessel', values: volume.vessel }],
      fieldData: [{ name: 'length_unit', values: joinTexts([unit]) }],
    },
  );
  return joinPieces(encoded);
}

/** Prisms with their last three corners first. */
function wedgesOf(prism: Int32Array): Int32Array {
  const out = new Int32Array(prism.length);
  for (let i = 0; i < prism.length; i += 6) {
    for (let k = 0; k < 6; k++) out[i + k] = prism[i + ((k + 3) % 6)]!;
  }
  return out;
}
