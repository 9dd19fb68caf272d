import { fromSi, type UNITS } from '../../core/units.ts';

/** Units that surface files may be written in. */
export const MESH_UNITS = ['m', 'mm', 'um'] as const satisfies readonly (keyof typeof UNITS)[];
export type MeshUnit = (typeof MESH_UNITS)[number];

/** Positions in a unit. The same number goes to the same number, so corners stay bit-identical. */
export function positionsIn(position: Float64Array, unit: MeshUnit): Float64Array {
  return unit === 'm' ? position : position.map((x) => fromSi(x, unit));
}
