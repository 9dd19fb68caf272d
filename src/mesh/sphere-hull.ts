import type { PatchMesh } from './patch-mesh.ts';

/**
 * Triangulates the vertices of a mesh by the convex hull of points on the unit sphere, one a vertex, which is their
 * Delaunay triangulation there. The mesh must hold vertices only.
 *
 * @param direction (3n) unit vectors; no four may lie in one circle by more than rounding, or the hull may come out torn
 * @returns whether the hull is whole: it has the 2n − 4 faces of a closed surface and shows them all to the origin
 * Source: incremental convex hull (beneath–beyond); common practice, no source.
 * Cost:   O(n · faces); the n of a junction is about 100.
 */
export function triangulateDirections(mesh: PatchMesh, direction: Float64Array): boolean {
  const n = mesh.vertices;
  const first = firstBody(direction, n);
  const visible = new Uint8Array(8 * n + 64);
  const startsAt = new Int32Array(n).fill(-1);
  const horizon: number[] = [];
  const seen: number[] = [];
  if (first === null) return false;
  const [a, b, c, d] = first;
  for (const [p, q, r] of [
    [a, b, c],
    [a, d, b],
    [b, d, c],
    [c, d, a],
  ] as const) {
    mesh.addTriangle(p, q, r);
  }
  linkAll(mesh);
  for (let v = 0; v < n; v++) {
    if (v === a || v === b || v === c || v === d) continue;
    seen.length = 0;
    for (let t = 0; t < mesh.triangles; t++) {
      if (mesh.from[3 * t]! < 0) continue;
      const sees = volume(direction, mesh.from[3 * t]!, mesh.from[3 * t + 1]!, mesh.from[3 * t + 2]!, v) > 0 ? 1 : 0;
      visible[t] = sees;
      if (sees === 1) seen.push(t);
    }
    if (seen.length === 0) return false;
    horizon.length = 0;
    for (const t of seen) {
      for (let h = 3 * t; h < 3 * t + 3; h++) {
        const twin = mesh.twin[h]!;
        if (visible[(twin / 3) | 0] === 0) horizon.push(mesh.from[h]!, mesh.from[mesh.next(h)]!, twin);
      }
    }
    for (const t of seen) mesh.removeTriangle(t);
    for (let i = 0; i < horizon.length; i += 3) {
      const t = mesh.addTriangle(horizon[i]!, horizon[i + 1]!, v);
      mesh.link(3 * t, horizon[i + 2]!);
      startsAt[horizon[i]!] = 3 * t + 2;
      visible[t] = 0;
    }
    for (let i = 0; i < horizon.length; i += 3) {
      // Of the triangle (p, q, v) the half-edge q→v meets v→q of the triangle that starts at q.
      const own = mesh.twin[horizon[i + 2]!]!;
      mesh.link(own + 1, startsAt[horizon[i + 1]!]!);
    }
  }
  let faces = 0;
  for (let t = 0; t < mesh.triangles; t++) {
    const p = mesh.from[3 * t]!;
    if (p < 0) continue;
    faces++;
    const q = mesh.from[3 * t + 1]!;
    const r = mesh.from[3 * t + 2]!;
    for (let h = 3 * t; h < 3 * t + 3; h++) {
      const twin = mesh.twin[h]!;
      if (mesh.twin[twin] !== h || mesh.from[mesh.next(h)] !== mesh.from[twin]) return false;
      mesh.leaving[mesh.from[h]!] = h;
    }
    if (!(triple(direction, p, q, r) > 0)) return false;
  }
  return faces === 2 * n - 4;
}

/** Six times the volume of the origin and three points. */
function triple(p: Float64Array, a: number, b: number, c: number): number {
  const bx = p[3 * b]!;
  const by = p[3 * b + 1]!;
  const bz = p[3 * b + 2]!;
  const cx = p[3 * c]!;
  const cy = p[3 * c + 1]!;
  const cz = p[3 * c + 2]!;
  return p[3 * a]! * (by * cz - bz * cy) + p[3 * a + 1]! * (bz * cx - bx * cz) + p[3 * a + 2]! * (bx * cy - by * cx);
}

/** Six times the volume of a tetrahedron; positive where d is on the outer side of (a, b, c). */
function volume(p: Float64Array, a: number, b: number, c: number, d: number): number {
  const ox = p[3 * a]!;
  const oy = p[3 * a + 1]!;
  const oz = p[3 * a + 2]!;
  const bx = p[3 * b]! - ox;
  const by = p[3 * b + 1]! - oy;
  const bz = p[3 * b + 2]! - oz;
  const cx = p[3 * c]! - ox;
  const cy = p[3 * c + 1]! - oy;
  const cz = p[3 * c + 2]! - oz;
  const dx = p[3 * d]! - ox;
  const dy = p[3 * d + 1]! - oy;
  const dz = p[3 * d + 2]! - oz;
  return dx * (by * cz - bz * cy) + dy * (bz * cx - bx * cz) + dz * (bx * cy - by * cx);
}

/** Four directions that span a body, the first three counter-clockwise from outside. */
function firstBody(p: Float64Array, n: number): [number, number, number, number] | null {
  const a = 0;
  let b = 1;
  let c = 2;
  let d = 3;
  let best = -1;
  for (let v = 1; v < n; v++) {
    const s = squared(p, a, v);
    if (s > best) {
      best = s;
      b = v;
    }
  }
  best = -1;
  for (let v = 1; v < n; v++) {
    const s = Math.min(squared(p, a, v), squared(p, b, v));
    if (s > best) {
      best = s;
      c = v;
    }
  }
  best = 0;
  let size = 0;
  for (let v = 1; v < n; v++) {
    const s = volume(p, a, b, c, v);
    if (Math.abs(s) > size) {
      size = Math.abs(s);
      best = s;
      d = v;
    }
  }
  if (!(size > 1e-9)) return null;
  return best < 0 ? [a, b, c, d] : [a, c, b, d];
}

function squared(p: Float64Array, a: number, b: number): number {
  const x = p[3 * a]! - p[3 * b]!;
  const y = p[3 * a + 1]! - p[3 * b + 1]!;
  const z = p[3 * a + 2]! - p[3 * b + 2]!;
  return x * x + y * y + z * z;
}

function linkAll(mesh: PatchMesh): void {
  for (let g = 0; g < 3 * mesh.triangles; g++) {
    for (let h = 0; h < 3 * mesh.triangles; h++) {
      if (mesh.from[g] === mesh.from[mesh.next(h)] && mesh.from[h] === mesh.from[mesh.next(g)]) mesh.link(g, h);
    }
  }
}
