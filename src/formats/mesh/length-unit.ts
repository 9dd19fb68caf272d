import { fromSi, toSi, type UNITS } from '../../core/units.ts';

/** Units that surface files may be written in. */
export const MESH_UNITS = ['m', 'mm', 'um'] as const satisfies readonly (keyof typeof UNITS)[];
export type MeshUnit = (typeof MESH_UNITS)[number];

/**
 * Positions in a unit. The same number goes to the same number, so corners stay bit-identical.
 *
 * @param from unit they are in; metres where left out
 * @returns    the positions themselves where the unit is theirs
 */
export function positionsIn(position: Float64Array, unit: MeshUnit, from: MeshUnit = 'm'): Float64Array {
  if (unit === from) return position;
  if (from === 'm') return position.map((x) => fromSi(x, unit));
  if (unit === 'm') return position.map((x) => toSi(x, from));
  return position.map((x) => fromSi(toSi(x, from), unit));
}
