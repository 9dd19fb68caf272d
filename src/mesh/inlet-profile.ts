import type { BoundaryRow } from './boundary-table.ts';
import type { LumenMesh } from './lumen.ts';

export const INLET_PROFILES = ['flat', 'parabolic'] as const;
export type InletProfile = (typeof INLET_PROFILES)[number];

/** Velocity at one corner of an inlet cap. */
export interface ProfileRow {
  readonly patch: string;
  /** m */
  readonly place: readonly [number, number, number];
  /** m/s, along the cap's normal into the lumen. */
  readonly velocity: readonly [number, number, number];
}

/**
 * Velocities at the corners of every inlet cap, square to it. Taken linear over each triangle, as flow solvers take
 * them, they carry just the flow of the boundary table.
 *
 * `flat`: the same at every corner, the rim too. `parabolic`: of developed laminar flow, 2 v̄ (1 − ρ²/r²), 0 at the rim
 * (Hagen–Poiseuille), scaled for the triangles; at 24 segments the scale is within a few per cent of 1.
 *
 * @param boundary the caps' flows, from `boundaryTable`
 */
export function inletProfile(mesh: LumenMesh, boundary: readonly BoundaryRow[], profile: InletProfile): ProfileRow[] {
  const flows = new Map(boundary.map((row) => [row.patch, row.flow]));
  const rows: ProfileRow[] = [];
  const faces = facesOfInlets(mesh);
  mesh.patches.forEach((patch, p) => {
    if (patch.kind !== 'inlet') return;
    const corners: number[] = [];
    const share = new Map<number, number>();
    let widest = 0;
    for (const t of faces[p]!) {
      const area = areaOf(mesh, t);
      for (let k = 0; k < 3; k++) {
        const v = mesh.triangle[3 * t + k]!;
        if (!share.has(v)) corners.push(v);
        share.set(v, (share.get(v) ?? 0) + area / 3);
        widest = Math.max(widest, distance(mesh, v, patch.centre));
      }
    }
    corners.sort((a, b) => a - b);
    // The rim is a polygon: its corners are the widest, and still to the last bit at rest.
    const shape = (v: number): number => {
      const part = distance(mesh, v, patch.centre) / widest;
      return profile === 'flat' ? 1 : part > 1 - 1e-9 ? 0 : 1 - part * part;
    };
    let flow = 0;
    for (const v of corners) flow += shape(v) * share.get(v)!;
    const scale = flows.get(patch.name)! / flow;
    for (const v of corners) {
      const speed = scale * shape(v);
      rows.push({
        patch: patch.name,
        place: [mesh.position[3 * v]!, mesh.position[3 * v + 1]!, mesh.position[3 * v + 2]!],
        velocity: [-patch.normal[0] * speed, -patch.normal[1] * speed, -patch.normal[2] * speed],
      });
    }
  });
  return rows;
}

/** Triangles of each inlet, by patch number. */
function facesOfInlets(mesh: LumenMesh): number[][] {
  const faces: number[][] = mesh.patches.map(() => []);
  for (let t = 0; t < mesh.patch.length; t++) {
    const p = mesh.patch[t]!;
    if (mesh.patches[p]!.kind === 'inlet') faces[p]!.push(t);
  }
  return faces;
}

function distance(mesh: LumenMesh, v: number, [x, y, z]: readonly [number, number, number]): number {
  const dx = mesh.position[3 * v]! - x;
  const dy = mesh.position[3 * v + 1]! - y;
  const dz = mesh.position[3 * v + 2]! - z;
  return Math.sqrt(dx * dx + dy * dy + dz * dz);
}

function areaOf(mesh: LumenMesh, t: number): number {
  const p = mesh.position;
  const [a, b, c] = [3 * mesh.triangle[3 * t]!, 3 * mesh.triangle[3 * t + 1]!, 3 * mesh.triangle[3 * t + 2]!];
  const [ux, uy, uz] = [p[b]! - p[a]!, p[b + 1]! - p[a + 1]!, p[b + 2]! - p[a + 2]!];
  const [vx, vy, vz] = [p[c]! - p[a]!, p[c + 1]! - p[a + 1]!, p[c + 2]! - p[a + 2]!];
  const nx = uy * vz - uz * vy;
  const ny = uz * vx - ux * vz;
  const nz = ux * vy - uy * vx;
  return 0.5 * Math.sqrt(nx * nx + ny * ny + nz * nz);
}
