import { KeyMap } from './key-map.ts';
import type { NodeWall } from './node-layers.ts';

/**
 * Largest skewness of the quadrilaterals between the layers' prisms over neighbouring triangles, as finite-volume solvers
 * take it: how far the line between the cells' centres misses the middle of their face, over the face's reach that way or a
 * fifth of the line, whichever is more. Thin layers over a sharp crease have it large.
 *
 * Source: OpenFOAM, whose checkMesh takes more than 4 for an error.
 *
 * @param fraction as in SectionDisc
 * Cost:  O(triangles · layers)
 */
export function layerSkewness(wall: NodeWall, fraction: Float64Array): number {
  const { triangle } = wall;
  const edges = new KeyMap();
  const last = fraction.length - 1;
  const share = Array.from(fraction, (f) => (1 - f) / (1 - fraction[last]!));
  let worst = 0;
  for (let i = 0; i < triangle.length; i++) {
    const t = i - (i % 3);
    const a = triangle[i]!;
    const b = triangle[t + ((i + 1) % 3)]!;
    const other = edges.get(b, a, 0);
    if (other < 0) {
      edges.add(a, b, 0, t);
      continue;
    }
    for (let l = 0; l < last; l++) worst = Math.max(worst, skewness(wall, a, b, t, other, share[l]!, share[l + 1]!));
  }
  return worst;
}

/** Skewness of the face over edge a, b between two depths, of the prisms over triangles s and t. */
function skewness(wall: NodeWall, a: number, b: number, s: number, t: number, outer: number, inner: number): number {
  const { position, shift } = wall;
  const at = (v: number, depth: number): Vector => [
    position[3 * v]! + depth * shift[3 * v]!,
    position[3 * v + 1]! + depth * shift[3 * v + 1]!,
    position[3 * v + 2]! + depth * shift[3 * v + 2]!,
  ];
  const centreOf = (first: number): Vector => {
    const sum: Vector = [0, 0, 0];
    for (let k = 0; k < 3; k++) {
      const place = at(wall.triangle[first + k]!, 0.5 * (outer + inner));
      for (let i = 0; i < 3; i++) sum[i]! += place[i]! / 3;
    }
    return sum;
  };
  const corners = [at(a, outer), at(b, outer), at(b, inner), at(a, inner)] as const;
  const middle: Vector = [0, 1, 2].map((k) => corners.reduce((sum, corner) => sum + corner[k]! / 4, 0)) as Vector;
  const square = cross(minus(corners[2], corners[0]), minus(corners[3], corners[1]));
  const from = centreOf(s);
  const line = minus(centreOf(t), from);
  const way = minus(middle, from);
  const part = dot(square, way) / dot(square, line);
  const miss: Vector = [way[0] - part * line[0], way[1] - part * line[1], way[2] - part * line[2]];
  const size = Math.sqrt(dot(miss, miss));
  if (!(size > 0)) return 0;
  let reach = 0.2 * Math.sqrt(dot(line, line));
  for (const corner of corners) reach = Math.max(reach, Math.abs(dot(miss, minus(corner, middle))) / size);
  return size / reach;
}

type Vector = [number, number, number];

function minus(a: Readonly<Vector>, b: Readonly<Vector>): Vector {
  return [a[0] - b[0], a[1] - b[1], a[2] - b[2]];
}

function dot(a: Readonly<Vector>, b: Readonly<Vector>): number {
  return a[0] * b[0] + a[1] * b[1] + a[2] * b[2];
}

function cross(a: Readonly<Vector>, b: Readonly<Vector>): Vector {
  return [a[1] * b[2] - a[2] * b[1], a[2] * b[0] - a[0] * b[2], a[0] * b[1] - a[1] * b[0]];
}
