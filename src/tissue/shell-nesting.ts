import type { Fault } from '../core/errors.ts';
import type { TriangleSurface } from '../core/surface.ts';
import { windingNumber } from './surface-measures.ts';
import { point } from './surface-text.ts';

/**
 * Outer shells must lie outside all others, inward ones inside exactly one piece.
 *
 * @param shell   (f) shell of each triangle
 * @param volumes (s) enclosed volume of each, negative where turned inwards
 * @returns       the first fault found, if any
 * Cost: one winding number for each pair of shells of which one lies in the other's box, one box test for each other pair.
 */
export function nestingFaults(
  surface: TriangleSurface,
  where: string,
  shell: Int32Array,
  volumes: Float64Array,
): Fault[] {
  if (volumes.length === 1) return [];
  const { position, triangle } = surface;
  const rows = shellRows(shell, volumes.length);
  const box = shellBoxes(surface, rows);
  for (let s = 0; s < rows.length; s++) {
    const corner = 3 * triangle[3 * rows[s]![0]!]!;
    const x = position[corner]!;
    const y = position[corner + 1]!;
    const z = position[corner + 2]!;
    let around = 0;
    for (let o = 0; o < rows.length; o++) {
      if (o === s || x < box[6 * o]! || x > box[6 * o + 3]!) continue;
      if (y < box[6 * o + 1]! || y > box[6 * o + 4]! || z < box[6 * o + 2]! || z > box[6 * o + 5]!) continue;
      around += Math.round(windingNumber(surface, x, y, z, rows[o]!));
    }
    const at = point(position, corner / 3);
    if (volumes[s]! > 0 && around !== 0) {
      const message = `got a piece inside another piece at ${at}, expected it turned inwards (a hollow) or left out`;
      return [{ code: 'nested-piece', where, message }];
    }
    if (volumes[s]! <= 0 && around !== 1) {
      const message = `got a piece that is inside out at ${at}, expected triangles counter-clockwise seen from outside`;
      return [{ code: 'inside-out', where, message }];
    }
  }
  return [];
}

/** Triangles of each shell, ascending. */
function shellRows(shell: Int32Array, shells: number): Int32Array[] {
  const lists = Array.from({ length: shells }, (): number[] => []);
  for (let t = 0; t < shell.length; t++) lists[shell[t]!]!.push(t);
  return lists.map((list) => Int32Array.from(list));
}

/** (6s) least x, y, z and greatest x, y, z of each shell. */
function shellBoxes({ position, triangle }: TriangleSurface, rows: readonly Int32Array[]): Float64Array {
  const box = new Float64Array(6 * rows.length);
  for (let s = 0; s < rows.length; s++) {
    for (let axis = 0; axis < 3; axis++) {
      let least = Number.POSITIVE_INFINITY;
      let most = Number.NEGATIVE_INFINITY;
      for (const t of rows[s]!) {
        for (let k = 0; k < 3; k++) {
          const value = position[3 * triangle[3 * t + k]! + axis]!;
          if (value < least) least = value;
          if (value > most) most = value;
        }
      }
      box[6 * s + axis] = least;
      box[6 * s + 3 + axis] = most;
    }
  }
  return box;
}
