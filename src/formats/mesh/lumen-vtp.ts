import { FaultList } from '../faults.ts';
import { openPiece } from '../vtk/data-set-reader.ts';
import { joinPieces } from '../vtk/data-set-writer.ts';
import { encodePolyData, type NamedArray } from '../vtk/poly-data-writer.ts';
import { MESH_UNITS } from './length-unit.ts';
import type { MeshSurface } from './mesh-surface.ts';

/**
 * A lumen surface as VTK XML PolyData: cell arrays `patch` (name), `patch_number` and `vessel`, point arrays
 * `pressure_Pa` and `wall_shear_Pa` of the one-dimensional solution, field data `length_unit` and `patch_names`.
 */
export function encodeLumenVtp(surface: MeshSurface): Uint8Array {
  const faces = surface.triangle.length / 3;
  const names = surface.patches.map((patch) => patch.name);
  const texts = new Array<string>(faces);
  for (let t = 0; t < faces; t++) texts[t] = names[surface.patch[t]!]!;
  const encoded = encodePolyData({
    points: surface.position,
    polys: { connectivity: surface.triangle, ends: triangleEnds(faces) },
    pointData: pointArrays(surface),
    cellData: [
      { name: 'patch', texts },
      { name: 'patch_number', values: surface.patch },
      { name: 'vessel', values: surface.vessel },
    ],
    fieldData: [
      { name: 'length_unit', texts: [surface.unit] },
      { name: 'patch_names', texts: names },
    ],
  });
  return joinPieces(encoded);
}

/** (f) one past the last corner of each triangle. */
export function triangleEnds(faces: number): Int32Array {
  const ends = new Int32Array(faces);
  for (let t = 0; t < faces; t++) ends[t] = 3 * t + 3;
  return ends;
}

export function pointArrays({ pressure, wallShear }: MeshSurface): NamedArray[] {
  const arrays: NamedArray[] = [];
  if (pressure !== null) arrays.push({ name: 'pressure_Pa', values: pressure });
  if (wallShear !== null) arrays.push({ name: 'wall_shear_Pa', values: wallShear });
  return arrays;
}

const LEGAL_NAME = /^[A-Za-z]\w*$/;

/**
 * Reads a lumen surface as `encodeLumenVtp` wrote it, or as another program saved it again.
 *
 * @param name file, for faults
 * @throws InputError naming each array that is missing or is not what it should be
 * Cost: O(v + f); texts of triangles are not looked at, `patch_number` is.
 */
export function decodeLumenVtp(bytes: Uint8Array, name: string): MeshSurface {
  const faults = new FaultList();
  const surface = readSurface(bytes, name, faults);
  faults.throwIfAny();
  return surface!;
}

/** @returns null after a fault */
function readSurface(bytes: Uint8Array, name: string, faults: FaultList): MeshSurface | null {
  const piece = openPiece(bytes, name, 'PolyData', faults);
  if (piece === null) return null;
  const corners = piece.read('Polys', 'connectivity');
  const ends = piece.read('Polys', 'offsets');
  const patchNumbers = piece.read('CellData', 'patch_number');
  const vessels = piece.read('CellData', 'vessel');
  const textsOf = (array: string): string[] | null => {
    const element = piece.fieldData.find(({ attributes }) => attributes.Name === array);
    if (element !== undefined) return piece.file.texts(element);
    faults.add('missing', `${name} FieldData`, `got no array ${array}, expected one`);
    return null;
  };
  const units = textsOf('length_unit');
  const names = textsOf('patch_names');
  const valuesOf = (array: string): Float64Array | null => {
    const element = piece.pointData.find(({ attributes }) => attributes.Name === array);
    const values = element === undefined ? null : piece.file.numbers(element);
    if (values === null || values.length === piece.points) return values;
    faults.add('length', `${name} ${array}`, `got ${values.length} numbers, expected ${piece.points}`);
    return null;
  };
  const pressure = valuesOf('pressure_Pa');
  const wallShear = valuesOf('wall_shear_Pa');
  if (corners === null || ends === null || patchNumbers === null || vessels === null) return null;
  if (units === null || names === null) return null;
  const faces = ends.length;
  if (faces === 0) faults.add('empty-surface', `${name} Polys`, 'got no triangles, expected some');
  if (corners.length !== 3 * faces || ends.some((end, t) => end !== 3 * t + 3))
    faults.add('not-triangles', `${name} Polys`, 'got polygons, expected triangles');
  judgeRows(corners, piece.points, `${name} connectivity`, faults);
  judgeRows(patchNumbers, names.length, `${name} patch_number`, faults);
  for (const [array, values] of [
    ['patch_number', patchNumbers],
    ['vessel', vessels],
  ] as const) {
    if (values.length !== faces)
      faults.add('length', `${name} ${array}`, `got ${values.length} numbers, expected ${faces}`);
  }
  const seen = new Set<string>();
  const wrong = names.find((patch) => !LEGAL_NAME.test(patch) || seen.size === seen.add(patch).size);
  if (wrong !== undefined) {
    const message = `got ${JSON.stringify(wrong)}, expected names of letters, digits and _, a letter first, none twice`;
    faults.add('bad-name', `${name} patch_names`, message);
  }
  const unit = MESH_UNITS.find((one) => one === units[0]);
  if (unit === undefined) {
    const message = `got ${JSON.stringify(units[0] ?? '')}, expected ${MESH_UNITS.join(', ')}`;
    faults.add('bad-unit', `${name} length_unit`, message);
  }
  const odd = piece.position.findIndex((x) => !Number.isFinite(x));
  if (odd >= 0) {
    const message = `got ${piece.position[odd]} at point ${Math.floor(odd / 3)}, expected finite numbers`;
    faults.add('non-finite', `${name} Points`, message);
  }
  if (faults.count > 0 || unit === undefined) return null;
  return {
    position: piece.position,
    unit,
    triangle: Int32Array.from(corners),
    patch: Int32Array.from(patchNumbers),
    patches: names.map((patch) => ({ name: patch })),
    vessel: Int32Array.from(vessels),
    pressure,
    wallShear,
  };
}

function judgeRows(rows: ArrayLike<number>, count: number, where: string, faults: FaultList): void {
  for (let i = 0; i < rows.length; i++) {
    const row = rows[i]!;
    if (Number.isInteger(row) && row >= 0 && row < count) continue;
    faults.add('bad-index', where, `got ${row} at position ${i}, expected 0 to ${count - 1}`);
    return;
  }
}
