import { InvariantError } from '../../core/errors.ts';
import type { LumenMesh } from '../../mesh/lumen.ts';
import type { FlowField, Forest } from '../../tree/forest.ts';
import { joinPieces } from '../vtk/data-set-writer.ts';
import { encodePolyData, type NamedArray } from '../vtk/poly-data-writer.ts';
import { type MeshUnit, positionsIn } from './length-unit.ts';

/**
 * A lumen surface as VTK XML PolyData: cell arrays `patch` (name), `patch_number` and `vessel`, point arrays
 * `pressure_Pa` and `wall_shear_Pa` of the one-dimensional solution, field data `length_unit` and `patch_names`.
 *
 * Pressure runs linearly along each vessel; shear is the vessel's.
 *
 * @param field solved on `forest`, or null where there is none
 * @throws InvariantError where the field belongs to another forest
 */
export function encodeLumenVtp(mesh: LumenMesh, forest: Forest, field: FlowField | null, unit: MeshUnit): Uint8Array {
  const faces = mesh.triangle.length / 3;
  const ends = new Int32Array(faces);
  for (let t = 0; t < faces; t++) ends[t] = 3 * t + 3;
  const names = mesh.patches.map((patch) => patch.name);
  const texts = new Array<string>(faces);
  for (let t = 0; t < faces; t++) texts[t] = names[mesh.patch[t]!]!;
  const pointData: NamedArray[] = [];
  if (field !== null) {
    if (field.forest !== forest) throw new InvariantError('encodeLumenVtp: the field was solved on another forest');
    const vertices = mesh.row.length;
    const pressure = new Float64Array(vertices);
    const shear = new Float64Array(vertices);
    for (let v = 0; v < vertices; v++) {
      const row = mesh.row[v]!;
      const above = field.pressure[forest.parent[row]!]!;
      pressure[v] = above + (field.pressure[row]! - above) * mesh.along[v]!;
      shear[v] = field.wallShear[row]!;
    }
    pointData.push({ name: 'pressure_Pa', values: pressure }, { name: 'wall_shear_Pa', values: shear });
  }
  const encoded = encodePolyData({
    points: positionsIn(mesh.position, unit),
    polys: { connectivity: mesh.triangle, ends },
    pointData,
    cellData: [
      { name: 'patch', texts },
      { name: 'patch_number', values: mesh.patch },
      { name: 'vessel', values: mesh.vessel },
    ],
    fieldData: [
      { name: 'length_unit', texts: [unit] },
      { name: 'patch_names', texts: names },
    ],
  });
  return joinPieces(encoded);
}
