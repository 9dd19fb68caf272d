import { InvariantError } from '../../core/errors.ts';
import type { LumenMesh } from '../../mesh/lumen.ts';
import type { FlowField, Forest } from '../../tree/forest.ts';
import { type MeshUnit, positionsIn } from './length-unit.ts';

/** A lumen surface as files hold it, made here or read from a `lumen.vtp`. */
export interface MeshSurface {
  /** (3v) in `unit` */
  readonly position: Float64Array;
  readonly unit: MeshUnit;
  /** (3f) vertex indices, counter-clockwise seen from outside the lumen. */
  readonly triangle: Int32Array;
  /** (f) index into `patches`. */
  readonly patch: Int32Array;
  /** The wall first, then the caps; names are letters, digits and `_`, a letter first, and unique. */
  readonly patches: readonly { readonly name: string }[];
  /** (f) number of the nearest vessel. */
  readonly vessel: Int32Array;
  /** (v) Pa, or null where the network was not solved. */
  readonly pressure: Float64Array | null;
  /** (v) Pa, or null. */
  readonly wallShear: Float64Array | null;
}

/** What most formats need of a surface; metres where no unit is told, as in a LumenMesh. */
export type NamedTriangles = Pick<MeshSurface, 'position' | 'triangle' | 'patch' | 'patches'> &
  Partial<Pick<MeshSurface, 'unit'>>;

/**
 * A lumen mesh with the one-dimensional solution at its corners: pressure runs linearly along each vessel, shear is the
 * vessel's.
 *
 * @param field solved on `forest`, or null where there is none
 * @throws InvariantError where the field belongs to another forest
 */
export function surfaceOfLumen(
  mesh: LumenMesh,
  forest: Forest,
  field: FlowField | null,
  unit: MeshUnit = 'm',
): MeshSurface {
  let pressure: Float64Array | null = null;
  let wallShear: Float64Array | null = null;
  if (field !== null) {
    if (field.forest !== forest) throw new InvariantError('surfaceOfLumen: the field was solved on another forest');
    const vertices = mesh.row.length;
    pressure = new Float64Array(vertices);
    wallShear = new Float64Array(vertices);
    for (let v = 0; v < vertices; v++) {
      const row = mesh.row[v]!;
      const above = field.pressure[forest.parent[row]!]!;
      pressure[v] = above + (field.pressure[row]! - above) * mesh.along[v]!;
      wallShear[v] = field.wallShear[row]!;
    }
  }
  const { triangle, patch, patches, vessel } = mesh;
  return { position: positionsIn(mesh.position, unit), unit, triangle, patch, patches, vessel, pressure, wallShear };
}

/** Triangles of each patch: those of patch p are list[start[p]] … list[start[p + 1] − 1], in their own order. */
export interface PatchLists {
  readonly start: Int32Array;
  readonly list: Int32Array;
}

export function trianglesByPatch(surface: Pick<MeshSurface, 'patch' | 'patches'>): PatchLists {
  const { patch, patches } = surface;
  const start = new Int32Array(patches.length + 1);
  for (const p of patch) start[p + 1]!++;
  for (let p = 0; p < patches.length; p++) start[p + 1]! += start[p]!;
  const next = start.slice();
  const list = new Int32Array(patch.length);
  for (let t = 0; t < patch.length; t++) list[next[patch[t]!]!++] = t;
  return { start, list };
}
