import type { TriangleSurface } from '../core/surface.ts';

/**
 * Volume enclosed by each shell, by the divergence theorem.
 *
 * @param shell (f) shell of each triangle, or null for all triangles together
 * @returns (shells) m³; negative where normals point inwards. Corners are taken relative to the first one, so that a
 *          small surface far from the origin keeps its digits.
 */
export function shellVolumes(surface: TriangleSurface, shell: Int32Array | null, shells: number): Float64Array {
  const { position, triangle } = surface;
  const out = new Float64Array(shells);
  const ox = position[0] ?? 0;
  const oy = position[1] ?? 0;
  const oz = position[2] ?? 0;
  for (let t = 0; t < triangle.length / 3; t++) {
    const a = 3 * triangle[3 * t]!;
    const b = 3 * triangle[3 * t + 1]!;
    const c = 3 * triangle[3 * t + 2]!;
    const ax = position[a]! - ox;
    const ay = position[a + 1]! - oy;
    const az = position[a + 2]! - oz;
    const bx = position[b]! - ox;
    const by = position[b + 1]! - oy;
    const bz = position[b + 2]! - oz;
    const cx = position[c]! - ox;
    const cy = position[c + 1]! - oy;
    const cz = position[c + 2]! - oz;
    const six = ax * (by * cz - bz * cy) + ay * (bz * cx - bx * cz) + az * (bx * cy - by * cx);
    out[shell === null ? 0 : shell[t]!]! += six / 6;
  }
  return out;
}

/**
 * How often a surface, or some of its triangles, wind round a point: 1 inside a closed surface with outward normals, 0
 * outside.
 *
 * @param rows triangles looked at, or null for all
 * Source: solid angle of a triangle, Van Oosterom & Strackee (1983), IEEE Trans Biomed Eng 30:125; from memory.
 * Cost:   one arctangent a triangle.
 */
export function windingNumber(
  surface: TriangleSurface,
  x: number,
  y: number,
  z: number,
  rows: Int32Array | null = null,
): number {
  const { position, triangle } = surface;
  const count = rows === null ? triangle.length / 3 : rows.length;
  let sum = 0;
  for (let i = 0; i < count; i++) {
    const t = rows === null ? i : rows[i]!;
    const a = 3 * triangle[3 * t]!;
    const b = 3 * triangle[3 * t + 1]!;
    const c = 3 * triangle[3 * t + 2]!;
    const ax = position[a]! - x;
    const ay = position[a + 1]! - y;
    const az = position[a + 2]! - z;
    const bx = position[b]! - x;
    const by = position[b + 1]! - y;
    const bz = position[b + 2]! - z;
    const cx = position[c]! - x;
    const cy = position[c + 1]! - y;
    const cz = position[c + 2]! - z;
    const la = Math.sqrt(ax * ax + ay * ay + az * az);
    const lb = Math.sqrt(bx * bx + by * by + bz * bz);
    const lc = Math.sqrt(cx * cx + cy * cy + cz * cz);
    const det = ax * (by * cz - bz * cy) + ay * (bz * cx - bx * cz) + az * (bx * cy - by * cx);
    const dot =
      la * lb * lc +
      (ax * bx + ay * by + az * bz) * lc +
      (bx * cx + by * cy + bz * cz) * la +
      (cx * ax + cy * ay + cz * az) * lb;
    sum += Math.atan2(det, dot);
  }
  return sum / (2 * Math.PI);
}
