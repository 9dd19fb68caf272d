import type { TriangleSurface } from '../core/surface.ts';
import type { SurfaceTopology } from './surface-topology.ts';

/** Outward normals that tell inside from outside for a foot on a face, an edge or a corner; all of length 1. */
export interface SurfaceNormals {
  /** (3f), (9f) one per half-edge, (3v). */
  readonly faceNormal: Float64Array;
  readonly edgeNormal: Float64Array;
  readonly cornerNormal: Float64Array;
}

/** @param topology of a closed surface: every half-edge has a twin */
export function surfaceNormals(surface: TriangleSurface, topology: SurfaceTopology): SurfaceNormals {
  const { position: p, triangle } = surface;
  const faces = triangle.length / 3;
  const faceNormal = new Float64Array(3 * faces);
  const edgeNormal = new Float64Array(9 * faces);
  const cornerNormal = new Float64Array(p.length);
  for (let t = 0; t < faces; t++) {
    const a = 3 * triangle[3 * t]!;
    const b = 3 * triangle[3 * t + 1]!;
    const c = 3 * triangle[3 * t + 2]!;
    const ux = p[b]! - p[a]!;
    const uy = p[b + 1]! - p[a + 1]!;
    const uz = p[b + 2]! - p[a + 2]!;
    const vx = p[c]! - p[a]!;
    const vy = p[c + 1]! - p[a + 1]!;
    const vz = p[c + 2]! - p[a + 2]!;
    faceNormal[3 * t] = uy * vz - uz * vy;
    faceNormal[3 * t + 1] = uz * vx - ux * vz;
    faceNormal[3 * t + 2] = ux * vy - uy * vx;
    toUnit(faceNormal, 3 * t);
    for (let k = 0; k < 3; k++) {
      const here = 3 * triangle[3 * t + k]!;
      const angle = cornerAngle(p, here, 3 * triangle[3 * t + ((k + 1) % 3)]!, 3 * triangle[3 * t + ((k + 2) % 3)]!);
      for (let axis = 0; axis < 3; axis++) cornerNormal[here + axis]! += angle * faceNormal[3 * t + axis]!;
    }
  }
  for (let e = 0; e < triangle.length; e++) {
    const own = e - (e % 3);
    const other = topology.twin[e]! - (topology.twin[e]! % 3);
    for (let axis = 0; axis < 3; axis++) edgeNormal[3 * e + axis] = faceNormal[own + axis]! + faceNormal[other + axis]!;
    toUnit(edgeNormal, 3 * e);
  }
  for (let v = 0; v < p.length; v += 3) toUnit(cornerNormal, v);
  return { faceNormal, edgeNormal, cornerNormal };
}

/**
 * True where no edge is concave, so that a surface of one shell without a crossing bounds a convex body
 * (local convexity is enough: Tietze 1928, Nakajima 1928; from memory). Holds to 1e-14 of the size across each edge.
 */
export function edgeConvexity(surface: TriangleSurface, topology: SurfaceTopology): boolean {
  const { position: p, triangle } = surface;
  const { faceNormal } = surfaceNormals(surface, topology);
  let size = 0;
  for (const value of p) size = Math.max(size, Math.abs(value - p[0]!));
  for (let e = 0; e < triangle.length; e++) {
    const own = e - (e % 3);
    const across = topology.twin[e]!;
    const apex = 3 * triangle[across % 3 === 0 ? across + 2 : across - 1]!;
    const on = 3 * triangle[e]!;
    const above =
      (p[apex]! - p[on]!) * faceNormal[own]! +
      (p[apex + 1]! - p[on + 1]!) * faceNormal[own + 1]! +
      (p[apex + 2]! - p[on + 2]!) * faceNormal[own + 2]!;
    if (above > 1e-14 * size) return false;
  }
  return true;
}

function cornerAngle(p: Float64Array, a: number, b: number, c: number): number {
  const ux = p[b]! - p[a]!;
  const uy = p[b + 1]! - p[a + 1]!;
  const uz = p[b + 2]! - p[a + 2]!;
  const vx = p[c]! - p[a]!;
  const vy = p[c + 1]! - p[a + 1]!;
  const vz = p[c + 2]! - p[a + 2]!;
  const nx = uy * vz - uz * vy;
  const ny = uz * vx - ux * vz;
  const nz = ux * vy - uy * vx;
  return Math.atan2(Math.sqrt(nx * nx + ny * ny + nz * nz), ux * vx + uy * vy + uz * vz);
}

function toUnit(values: Float64Array, at: number): void {
  const x = values[at]!;
  const y = values[at + 1]!;
  const z = values[at + 2]!;
  const length = Math.sqrt(x * x + y * y + z * z);
  if (!(length > 0)) return;
  values[at] = x / length;
  values[at + 1] = y / length;
  values[at + 2] = z / length;
}
