import type { Welded } from './weld.ts';

/** Directions of rays, of unit length within rounding and along no axis or diagonal. */
const WAYS = [
  [0.4851, 0.7127, 0.5066],
  [-0.6313, 0.3719, 0.6805],
  [0.2917, -0.5833, 0.7581],
] as const;

/**
 * The parts of a closed surface that a point lies inside of, by the parity of the crossings of three rays; the majority
 * decides where a ray meets an edge.
 *
 * @param part  (f) part of each triangle
 * @param parts how many
 * Cost: O(f) a point
 */
export function partsRound(
  mesh: Welded,
  part: Int32Array,
  parts: number,
  point: readonly [number, number, number],
): number[] {
  const votes = new Int32Array(parts);
  for (const way of WAYS) {
    const crossings = new Int32Array(parts);
    for (let f = 0; f < part.length; f++) if (rayMeets(mesh, f, point, way)) crossings[part[f]!]!++;
    crossings.forEach((count, k) => {
      votes[k]! += count % 2;
    });
  }
  return [...votes.keys()].filter((k) => votes[k]! >= 2);
}

/** Whether a ray meets a triangle: solves point + t way = a + u (b − a) + v (c − a) by Cramer's rule. */
function rayMeets(mesh: Welded, f: number, [x, y, z]: readonly number[], [wx, wy, wz]: readonly number[]): boolean {
  const { position: p, triangle } = mesh;
  const a = 3 * triangle[3 * f]!;
  const b = 3 * triangle[3 * f + 1]!;
  const c = 3 * triangle[3 * f + 2]!;
  const e1x = p[b]! - p[a]!;
  const e1y = p[b + 1]! - p[a + 1]!;
  const e1z = p[b + 2]! - p[a + 2]!;
  const e2x = p[c]! - p[a]!;
  const e2y = p[c + 1]! - p[a + 1]!;
  const e2z = p[c + 2]! - p[a + 2]!;
  const hx = wy! * e2z - wz! * e2y;
  const hy = wz! * e2x - wx! * e2z;
  const hz = wx! * e2y - wy! * e2x;
  const det = e1x * hx + e1y * hy + e1z * hz;
  if (det === 0) return false;
  const sx = x! - p[a]!;
  const sy = y! - p[a + 1]!;
  const sz = z! - p[a + 2]!;
  const u = (sx * hx + sy * hy + sz * hz) / det;
  if (!(u >= 0 && u <= 1)) return false;
  const qx = sy * e1z - sz * e1y;
  const qy = sz * e1x - sx * e1z;
  const qz = sx * e1y - sy * e1x;
  const v = (wx! * qx + wy! * qy + wz! * qz) / det;
  if (!(v >= 0 && u + v <= 1)) return false;
  return (e2x * qx + e2y * qy + e2z * qz) / det > 0;
}
