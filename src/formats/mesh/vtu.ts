import { encodeDataSet, joinPieces, joinTexts } from '../vtk/data-set-writer.ts';
import { pointArrays, triangleEnds } from './lumen-vtp.ts';
import type { MeshSurface } from './mesh-surface.ts';

/** Number of VTK's cell type for a triangle. */
const TRIANGLE = 5;

/**
 * A lumen surface as VTK XML UnstructuredGrid of triangles, with the arrays of `lumen.vtp` but for the name of each
 * triangle's patch: not every reader of these files knows arrays of text, and meshio 5 refuses a whole file for one. The
 * names stand in the field array `patch_names` as UInt8 codes, each ended by a 0, in the order of `patch_number`.
 *
 * Source: VTK XML formats as documented by Kitware; cell types as numbered there.
 */
export function encodeLumenVtu(surface: MeshSurface): Uint8Array {
  const faces = surface.triangle.length / 3;
  const encoded = encodeDataSet(
    {
      type: 'UnstructuredGrid',
      counts: { NumberOfCells: faces },
      cells: {
        Cells: [
          { name: 'connectivity', values: surface.triangle },
          { name: 'offsets', values: triangleEnds(faces) },
          { name: 'types', values: new Uint8Array(faces).fill(TRIANGLE) },
        ],
      },
    },
    {
      points: surface.position,
      pointData: pointArrays(surface),
      cellData: [
        { name: 'patch_number', values: surface.patch },
        { name: 'vessel', values: surface.vessel },
      ],
      fieldData: [
        { name: 'length_unit', values: joinTexts([surface.unit]) },
        { name: 'patch_names', values: joinTexts(surface.patches.map(({ name }) => name)) },
      ],
    },
  );
  return joinPieces(encoded);
}
