import type { TriangleSurface } from '../core/surface.ts';
import { buildBoxTree, nearestSquaredDistance, traversalStack, visitOverlaps } from './box-tree.ts';
import type { Region } from './depth.ts';

/**
 * Signed distance to a closed triangle surface, which may be non-convex.
 *
 * Size: least distance to any triangle. Sign: parity of the crossings of the upward ray. A ray through an edge or a
 * corner is counted once because the test in projection is half-open and works each shared edge out from the same end.
 *
 * Cost: building O(f); a query some tens of boxes and triangles.
 */
export function measureSurface(surface: TriangleSurface): Region {
  const { position, triangle } = surface;
  const count = triangle.length / 3;
  const boxOf = (face: number, out: Float64Array) => {
    for (let k = 0; k < 3; k++) {
      const a = position[3 * triangle[3 * face]! + k]!;
      const b = position[3 * triangle[3 * face + 1]! + k]!;
      const c = position[3 * triangle[3 * face + 2]! + k]!;
      out[k] = Math.min(a, b, c);
      out[k + 3] = Math.max(a, b, c);
    }
  };
  const tree = buildBoxTree(count, boxOf);
  const stack = traversalStack();
  const min = [Infinity, Infinity, Infinity] as [number, number, number];
  const max = [-Infinity, -Infinity, -Infinity] as [number, number, number];
  for (let at = 0; at < position.length; at++) {
    const k = (at % 3) as 0 | 1 | 2;
    min[k] = Math.min(min[k], position[at]!);
    max[k] = Math.max(max[k], position[at]!);
  }
  const ray = new Float64Array(6);
  let px = 0;
  let py = 0;
  let pz = 0;
  let crossings = 0;
  const cross = (slot: number) => {
    const face = tree.item[slot]!;
    if (risesThrough(position, triangle[3 * face]!, triangle[3 * face + 1]!, triangle[3 * face + 2]!, px, py, pz))
      crossings++;
  };
  const distance = (face: number) =>
    squaredPointTriangle(position, triangle[3 * face]!, triangle[3 * face + 1]!, triangle[3 * face + 2]!, px, py, pz);
  return {
    depth: (x, y, z) => {
      px = x;
      py = y;
      pz = z;
      const size = Math.sqrt(nearestSquaredDistance(tree, x, y, z, stack, distance));
      ray[0] = x;
      ray[3] = x;
      ray[1] = y;
      ray[4] = y;
      ray[2] = z;
      ray[5] = Infinity;
      crossings = 0;
      visitOverlaps(tree, ray, 0, stack, cross);
      return crossings % 2 === 1 ? size : -size;
    },
    min,
    max,
  };
}

/** Does the edge p–q, seen along z, pass the point (x, y) on the side of greater x? Half-open in y. */
function passes(position: Float64Array, p: number, q: number, x: number, y: number): boolean {
  // Always from the lower corner number, so that both triangles of an edge compute the same.
  const a = Math.min(p, q);
  const b = Math.max(p, q);
  const ya = position[3 * a + 1]!;
  const yb = position[3 * b + 1]!;
  if (ya > y === yb > y) return false;
  const xa = position[3 * a]!;
  const xb = position[3 * b]!;
  return x < xa + ((y - ya) / (yb - ya)) * (xb - xa);
}

/** Does the ray from (x, y, z) along +z pass through the triangle? */
function risesThrough(
  position: Float64Array,
  a: number,
  b: number,
  c: number,
  x: number,
  y: number,
  z: number,
): boolean {
  const inside = passes(position, a, b, x, y) !== (passes(position, b, c, x, y) !== passes(position, c, a, x, y));
  if (!inside) return false;
  const za = position[3 * a + 2]!;
  const zb = position[3 * b + 2]!;
  const zc = position[3 * c + 2]!;
  const ux = position[3 * b]! - position[3 * a]!;
  const uy = position[3 * b + 1]! - position[3 * a + 1]!;
  const vx = position[3 * c]! - position[3 * a]!;
  const vy = position[3 * c + 1]! - position[3 * a + 1]!;
  const wx = x - position[3 * a]!;
  const wy = y - position[3 * a + 1]!;
  const area = ux * vy - uy * vx;
  const low = Math.min(za, zb, zc);
  const high = Math.max(za, zb, zc);
  if (area === 0) return 0.5 * (low + high) > z;
  const height = za + ((wx * vy - wy * vx) * (zb - za) + (ux * wy - uy * wx) * (zc - za)) / area;
  return Math.min(high, Math.max(low, height)) > z;
}

/** Squared distance from a point to a triangle: to its plane where the foot lies inside, else to its nearest edge. */
export function squaredPointTriangle(
  position: Float64Array,
  a: number,
  b: number,
  c: number,
  x: number,
  y: number,
  z: number,
): number {
  const ax = position[3 * a]!;
  const ay = position[3 * a + 1]!;
  const az = position[3 * a + 2]!;
  const ux = position[3 * b]! - ax;
  const uy = position[3 * b + 1]! - ay;
  const uz = position[3 * b + 2]! - az;
  const vx = position[3 * c]! - ax;
  const vy = position[3 * c + 1]! - ay;
  const vz = position[3 * c + 2]! - az;
  const wx = x - ax;
  const wy = y - ay;
  const wz = z - az;
  const nx = uy * vz - uz * vy;
  const ny = uz * vx - ux * vz;
  const nz = ux * vy - uy * vx;
  const nn = nx * nx + ny * ny + nz * nz;
  if (nn > 0) {
    // Barycentric coordinates of the foot: (w × v)·n / n² along u, (u × w)·n / n² along v.
    const s = ((wy * vz - wz * vy) * nx + (wz * vx - wx * vz) * ny + (wx * vy - wy * vx) * nz) / nn;
    const t = ((uy * wz - uz * wy) * nx + (uz * wx - ux * wz) * ny + (ux * wy - uy * wx) * nz) / nn;
    if (s >= 0 && t >= 0 && s + t <= 1) {
      const height = wx * nx + wy * ny + wz * nz;
      return (height * height) / nn;
    }
  }
  return Math.min(
    squaredToEdge(wx, wy, wz, ux, uy, uz),
    squaredToEdge(wx, wy, wz, vx, vy, vz),
    squaredToEdge(wx - ux, wy - uy, wz - uz, vx - ux, vy - uy, vz - uz),
  );
}

/** Squared distance from w to the segment from the origin to u. */
function squaredToEdge(wx: number, wy: number, wz: number, ux: number, uy: number, uz: number): number {
  const uu = ux * ux + uy * uy + uz * uz;
  const along = wx * ux + wy * uy + wz * uz;
  const t = uu > 0 ? Math.min(1, Math.max(0, along / uu)) : 0;
  const dx = wx - t * ux;
  const dy = wy - t * uy;
  const dz = wz - t * uz;
  return dx * dx + dy * dy + dz * dz;
}
