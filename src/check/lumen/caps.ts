import type { Tally } from '../result.ts';
import type { BoundaryTable } from './boundary.ts';
import { type Edges, JoinedSets, nextHalf } from './topology.ts';
import type { Welded } from './weld.ts';

/** How many radii before a cap the wall must be a straight tube. */
const STRAIGHT = 2;

/** What is measured of every cap; named by the row of the boundary table. */
export interface CapTallies {
  /** Sees the farthest corner from the cap's own plane, over the radius. */
  readonly flat: Tally;
  /** Sees the angle in rad between the cap and the table's normal, and between the cap and the vessel's axis. */
  readonly square: Tally;
  /** Sees |area/(πr²) − 1|. */
  readonly area: Tally;
  /** Sees the distance of the cap's centroid from the table's centre, over the radius. */
  readonly centre: Tally;
  /** Sees the number of edges on the rim. */
  readonly rimCount: Tally;
  /** Sees the longest edge of the rim, over the radius. */
  readonly rimEdge: Tally;
  /** Takes caps that are not one disc whose rim borders the wall. */
  readonly disc: Tally;
  /** Sees how far the wall near the cap strays from a straight tube, over the radius. */
  readonly straight: Tally;
}

/** Axis of the vessel at a place, pointing away from the vessel's other end; null where no network is known. */
export type AxisAt = (x: number, y: number, z: number, near: number) => readonly [number, number, number] | null;

/**
 * Measures every cap of a lumen surface against its row of the boundary table.
 *
 * @param mesh    in m
 * @param patchOf (f) row of the boundary table that each triangle caps, −1 for the wall, −2 for neither
 */
export function measureCaps(
  mesh: Welded,
  edges: Edges,
  patchOf: Int32Array,
  table: BoundaryTable,
  axisAt: AxisAt,
  tallies: CapTallies,
): void {
  const caps = table.count;
  const faces = groupBy(patchOf, caps);
  const rims: number[][] = Array.from({ length: caps }, () => []);
  const insides = new Int32Array(caps);
  const bordersWall = new Uint8Array(caps).fill(1);
  for (let e = 0; e < edges.count; e++) {
    const from = edges.sideStart[e]!;
    const to = edges.sideStart[e + 1]!;
    const patch = patchOf[Math.floor(edges.side[from]! / 3)]!;
    let border = to - from === 1;
    for (let k = from + 1; k < to; k++) if (patchOf[Math.floor(edges.side[k]! / 3)] !== patch) border = true;
    if (!border) {
      if (patch >= 0) insides[patch]!++;
      continue;
    }
    for (let k = from; k < to; k++) {
      const here = patchOf[Math.floor(edges.side[k]! / 3)]!;
      if (here < 0) continue;
      rims[here]!.push(edges.side[k]!);
      const walls = [...edges.side.subarray(from, to)].filter((half) => patchOf[Math.floor(half / 3)] === -1);
      if (walls.length !== 1) bordersWall[here] = 0;
    }
  }
  const around = listCorners(mesh);
  const seen = new Int32Array(mesh.position.length / 3).fill(-1);
  for (let cap = 0; cap < caps; cap++) {
    if (faces[cap]!.length === 0) continue;
    const bordered = bordersWall[cap] === 1;
    const plane = measureCap(mesh, faces[cap]!, rims[cap]!, insides[cap]!, bordered, cap, table, axisAt, tallies);
    const stray = measureStray(mesh, around, patchOf, rims[cap]!, cap, table.radius[cap]!, plane, seen);
    tallies.straight.see(stray, cap);
  }
}

/** A cap as it is, whatever the table says. */
interface CapPlane {
  /** Unit normal out of the lumen. */
  readonly normal: readonly [number, number, number];
  /** m */
  readonly centre: readonly [number, number, number];
}

function measureCap(
  mesh: Welded,
  faces: readonly number[],
  rim: readonly number[],
  inside: number,
  bordersWall: boolean,
  cap: number,
  table: BoundaryTable,
  axisAt: AxisAt,
  tallies: CapTallies,
): CapPlane {
  const { position, triangle } = mesh;
  const r = table.radius[cap]!;
  const centre = [table.centre[3 * cap]!, table.centre[3 * cap + 1]!, table.centre[3 * cap + 2]!] as const;
  // Area vector, area and centroid, from coordinates relative to the table's centre.
  const normal: [number, number, number] = [0, 0, 0];
  const centroid: [number, number, number] = [0, 0, 0];
  let area = 0;
  const at = (v: number, k: number) => position[3 * v + k]! - centre[k]!;
  for (const f of faces) {
    const a = triangle[3 * f]!;
    const b = triangle[3 * f + 1]!;
    const c = triangle[3 * f + 2]!;
    const u = [at(b, 0) - at(a, 0), at(b, 1) - at(a, 1), at(b, 2) - at(a, 2)] as const;
    const v = [at(c, 0) - at(a, 0), at(c, 1) - at(a, 1), at(c, 2) - at(a, 2)] as const;
    const n = [u[1] * v[2] - u[2] * v[1], u[2] * v[0] - u[0] * v[2], u[0] * v[1] - u[1] * v[0]] as const;
    const own = 0.5 * Math.hypot(n[0], n[1], n[2]);
    area += own;
    for (const k of [0, 1, 2] as const) {
      normal[k] += 0.5 * n[k];
      centroid[k] += (own * (at(a, k) + at(b, k) + at(c, k))) / 3;
    }
  }
  const size = Math.hypot(normal[0], normal[1], normal[2]);
  for (const k of [0, 1, 2] as const) {
    normal[k] /= size;
    centroid[k] /= area;
  }
  let off = 0;
  const vertices = new Set<number>();
  for (const f of faces) {
    for (let k = 0; k < 3; k++) {
      const v = triangle[3 * f + k]!;
      vertices.add(v);
      const height =
        (at(v, 0) - centroid[0]) * normal[0] +
        (at(v, 1) - centroid[1]) * normal[1] +
        (at(v, 2) - centroid[2]) * normal[2];
      off = Math.max(off, Math.abs(height));
    }
  }
  tallies.flat.see(off / r, cap);
  const told = [table.normal[3 * cap]!, table.normal[3 * cap + 1]!, table.normal[3 * cap + 2]!] as const;
  tallies.square.see(angleBetween(normal, told), cap);
  const axis = axisAt(centre[0], centre[1], centre[2], 0.05 * r);
  if (axis !== null) tallies.square.see(angleBetween(normal, axis), cap);
  tallies.area.see(Math.abs(area / (Math.PI * r * r) - 1), cap);
  tallies.centre.see(Math.hypot(centroid[0], centroid[1], centroid[2]) / r, cap);

  tallies.rimCount.see(rim.length, cap);
  let longest = 0;
  const index = new Map<number, number>();
  for (const half of rim) {
    const p = triangle[half]!;
    const q = triangle[nextHalf(half)]!;
    longest = Math.max(longest, Math.hypot(at(p, 0) - at(q, 0), at(p, 1) - at(q, 1), at(p, 2) - at(q, 2)));
    for (const v of [p, q]) if (!index.has(v)) index.set(v, index.size);
  }
  tallies.rimEdge.see(longest / r, cap);
  // A disc has one rim and V − E + F = 1.
  const loops = new JoinedSets(index.size);
  for (const half of rim) loops.join(index.get(triangle[half]!)!, index.get(triangle[nextHalf(half)]!)!);
  let rims = 0;
  for (let k = 0; k < index.size; k++) if (loops.find(k) === k) rims++;
  const euler = vertices.size - (inside + rim.length) + faces.length;
  tallies.disc.checked++;
  const name = table.name[cap]!;
  if (rims !== 1 || euler !== 1) {
    const message = `the cap has ${rims} rims and V − E + F = ${euler}, expected one disc`;
    tallies.disc.fail(name, cap, 1, 0, message);
  } else if (!bordersWall) tallies.disc.fail(name, cap, 1, 0, 'the rim does not border the wall all round');
  const middle = [centroid[0] + centre[0], centroid[1] + centre[1], centroid[2] + centre[2]] as const;
  return { normal, centre: middle };
}

/** Greatest relative departure of wall corners within two radii of a cap from the mean radius of its rim. */
function measureStray(
  mesh: Welded,
  around: CornerLists,
  patchOf: Int32Array,
  rim: readonly number[],
  cap: number,
  r: number,
  plane: CapPlane,
  seen: Int32Array,
): number {
  const { position, triangle } = mesh;
  const { normal: n, centre: c } = plane;
  const waiting: number[] = [];
  const place = (v: number) => {
    const dx = position[3 * v]! - c[0];
    const dy = position[3 * v + 1]! - c[1];
    const dz = position[3 * v + 2]! - c[2];
    const along = dx * n[0] + dy * n[1] + dz * n[2];
    const across = Math.sqrt(Math.max(0, dx * dx + dy * dy + dz * dz - along * along));
    return { inward: -along, across };
  };
  let mean = 0;
  for (const half of rim) {
    const v = triangle[half]!;
    mean += place(v).across / rim.length;
    if (seen[v] !== cap) waiting.push(v);
    seen[v] = cap;
  }
  let stray = 0;
  while (waiting.length > 0) {
    const v = waiting.pop()!;
    for (let k = around.start[v]!; k < around.start[v + 1]!; k++) {
      const face = Math.floor(around.corner[k]! / 3);
      if (patchOf[face] !== -1) continue;
      for (let j = 0; j < 3; j++) {
        const w = triangle[3 * face + j]!;
        if (seen[w] === cap) continue;
        seen[w] = cap;
        const { inward, across } = place(w);
        if (inward > STRAIGHT * r * (1 - 1e-6)) continue;
        stray = Math.max(stray, Math.abs(across - mean) / r);
        waiting.push(w);
      }
    }
  }
  return stray;
}

interface CornerLists {
  readonly start: Int32Array;
  readonly corner: Int32Array;
}

/** Triangle corners at every vertex. */
function listCorners(mesh: Welded): CornerLists {
  const start = new Int32Array(mesh.position.length / 3 + 1);
  for (const v of mesh.triangle) start[v + 1]!++;
  for (let v = 0; v + 1 < start.length; v++) start[v + 1]! += start[v]!;
  const fill = start.slice();
  const corner = new Int32Array(mesh.triangle.length);
  mesh.triangle.forEach((v, k) => {
    corner[fill[v]!++] = k;
  });
  return { start, corner };
}

function groupBy(patchOf: Int32Array, caps: number): number[][] {
  const faces: number[][] = Array.from({ length: caps }, () => []);
  patchOf.forEach((patch, f) => {
    if (patch >= 0) faces[patch]!.push(f);
  });
  return faces;
}

function angleBetween(u: readonly [number, number, number], v: readonly [number, number, number]): number {
  return Math.atan2(
    Math.hypot(u[1] * v[2] - u[2] * v[1], u[2] * v[0] - u[0] * v[2], u[0] * v[1] - u[1] * v[0]),
    u[0] * v[0] + u[1] * v[1] + u[2] * v[2],
  );
}
