import type { LumenVolume } from '../../src/volume/lumen-volume.ts';
import type { VolumeFlow } from '../../src/volume/volume-flow.ts';

type Point = readonly [number, number, number];

/** Local corners of the faces of each kind of cell. */
const KINDS = [
  ['tetrahedron', 4, ['123', '032', '013', '021']],
  ['pyramid', 5, ['0321', '014', '124', '234', '304']],
  ['prism', 6, ['021', '345', '0143', '1254', '2035']],
] as const;

/** Tetrahedra of a cell from its least corner, quadrilaterals across from it cut from their own: both sides of a face agree. */
function cutCell(corners: readonly number[], faces: readonly string[]): number[][] {
  const least = Math.min(...corners);
  const out: number[][] = [];
  for (const list of faces) {
    const face = [...list].map((c) => corners[Number(c)]!);
    if (face.includes(least)) continue;
    const start = face.indexOf(Math.min(...face));
    const turned = [...face.slice(start), ...face.slice(0, start)];
    for (let i = 1; i + 1 < turned.length; i++) out.push([least, turned[0]!, turned[i]!, turned[i + 1]!]);
  }
  return out;
}

/**
 * Flux through the plane across a point, m³/s, of the cells of one vessel within a distance from the point.
 *
 * @param normal unit length
 */
export function fluxAcross(
  mesh: LumenVolume,
  flow: VolumeFlow,
  vessel: number,
  [x, y, z]: Point,
  [nx, ny, nz]: Point,
  reach: number,
): number {
  const p = mesh.position;
  const height = (v: number): number => (p[3 * v]! - x) * nx + (p[3 * v + 1]! - y) * ny + (p[3 * v + 2]! - z) * nz;
  let flux = 0;
  let cell = 0;
  for (const [key, size, faces] of KINDS) {
    for (let at = 0; at < mesh[key].length; at += size, cell++) {
      if (mesh.vessel[cell] !== vessel) continue;
      const corners = mesh[key].subarray(at, at + size);
      const a = corners[0]!;
      if (Math.hypot(p[3 * a]! - x, p[3 * a + 1]! - y, p[3 * a + 2]! - z) > reach) continue;
      const heights = [...corners].map(height);
      if (heights.every((h) => h > 0) || heights.every((h) => h <= 0)) continue;
      for (const tet of cutCell([...corners], faces)) flux += fluxOf(tet);
    }
  }
  return flux;

  function fluxOf(tet: number[]): number {
    const above = tet.filter((v) => height(v) > 0);
    const below = tet.filter((v) => height(v) <= 0);
    if (above.length === 0 || below.length === 0) return 0;
    const cross = (v: number, w: number) => {
      const t = height(v) / (height(v) - height(w));
      const at = (values: Float64Array, k: number) =>
        values[3 * v + k]! + t * (values[3 * w + k]! - values[3 * v + k]!);
      const u = at(flow.velocity, 0) * nx + at(flow.velocity, 1) * ny + at(flow.velocity, 2) * nz;
      return { place: [at(p, 0), at(p, 1), at(p, 2)], u };
    };
    const rim =
      above.length === 2 && below.length === 2
        ? [
            cross(above[0]!, below[0]!),
            cross(above[0]!, below[1]!),
            cross(above[1]!, below[1]!),
            cross(above[1]!, below[0]!),
          ]
        : above.flatMap((v) => below.map((w) => cross(v, w)));
    let sum = 0;
    for (let i = 1; i + 1 < rim.length; i++) {
      const [a, b, c] = [rim[0]!, rim[i]!, rim[i + 1]!];
      const e = b.place.map((q, k) => q - a.place[k]!);
      const f = c.place.map((q, k) => q - a.place[k]!);
      const area =
        Math.hypot(e[1]! * f[2]! - e[2]! * f[1]!, e[2]! * f[0]! - e[0]! * f[2]!, e[0]! * f[1]! - e[1]! * f[0]!) / 2;
      sum += (area * (a.u + b.u + c.u)) / 3;
    }
    return sum;
  }
}
