import type { Welded } from './weld.ts';

/** Sets of numbers that are joined pair by pair. */
export class JoinedSets {
  readonly #up: Int32Array;

  constructor(count: number) {
    this.#up = Int32Array.from({ length: count }, (_, i) => i);
  }

  /** Least-climb representative of a number's set. */
  find(i: number): number {
    const up = this.#up;
    let at = i;
    while (up[at] !== at) {
      up[at] = up[up[at]!]!;
      at = up[at]!;
    }
    return at;
  }

  /** Joins two sets; the lower representative stays. */
  join(i: number, j: number): void {
    const a = this.find(i);
    const b = this.find(j);
    if (a < b) this.#up[b] = a;
    else this.#up[a] = b;
  }
}

/** Undirected edges of a triangle surface and the triangles on them. */
export interface Edges {
  readonly count: number;
  /** (2e) lower vertex, higher vertex. */
  readonly vertex: Int32Array;
  /** (e + 1) the sides of edge k are side[sideStart[k]] … side[sideStart[k + 1] − 1]. */
  readonly sideStart: Int32Array;
  /** (3f) half-edges 3f + k, from corner k of triangle f to the next. */
  readonly side: Int32Array;
}

/** Finds the edges. Cost: O(f) for vertices of few triangles. */
export function listEdges(mesh: Welded): Edges {
  const { triangle, position } = mesh;
  const halves = triangle.length;
  const start = new Int32Array(position.length / 3 + 1);
  const low = (h: number) => Math.min(triangle[h]!, triangle[nextHalf(h)]!);
  const high = (h: number) => Math.max(triangle[h]!, triangle[nextHalf(h)]!);
  for (let h = 0; h < halves; h++) start[low(h) + 1]!++;
  for (let v = 0; v + 1 < start.length; v++) start[v + 1]! += start[v]!;
  const side = new Int32Array(halves);
  const fill = start.slice();
  for (let h = 0; h < halves; h++) side[fill[low(h)]!++] = h;
  const vertex: number[] = [];
  const sideStart: number[] = [];
  for (let v = 0; v + 1 < start.length; v++) {
    const run = side.subarray(start[v]!, start[v + 1]!);
    run.sort((a, b) => high(a) - high(b) || a - b);
    for (let k = 0; k < run.length; k++) {
      if (k > 0 && high(run[k]!) === high(run[k - 1]!)) continue;
      sideStart.push(start[v]! + k);
      vertex.push(v, high(run[k]!));
    }
  }
  const count = sideStart.length;
  sideStart.push(halves);
  return { count, vertex: Int32Array.from(vertex), sideStart: Int32Array.from(sideStart), side };
}

/** The half-edge after one in its triangle. */
export function nextHalf(half: number): number {
  return half % 3 === 2 ? half - 2 : half + 1;
}

/** How a surface hangs together. */
export interface Components {
  readonly count: number;
  /** (f) component of each triangle, numbered by first triangle. */
  readonly ofTriangle: Int32Array;
  /** (count) V − E + F; 2 − 2g for a closed surface of genus g. */
  readonly euler: Int32Array;
  /** (count) signed volume in cubed file units, positive where normals point out. */
  readonly volume: Float64Array;
  /** (v) number of separate fans of triangles round each vertex; 1 on a two-manifold. */
  readonly fans: Int32Array;
}

/** Splits a surface into the parts that hang together by edges, and measures each. */
export function measureComponents(mesh: Welded, edges: Edges): Components {
  const { triangle, position } = mesh;
  const faces = triangle.length / 3;
  const vertices = position.length / 3;
  const joined = new JoinedSets(faces);
  const corners = new JoinedSets(triangle.length);
  for (let e = 0; e < edges.count; e++) {
    const first = edges.side[edges.sideStart[e]!]!;
    for (let k = edges.sideStart[e]! + 1; k < edges.sideStart[e + 1]!; k++) {
      const other = edges.side[k]!;
      joined.join(Math.floor(first / 3), Math.floor(other / 3));
      // The corners of both triangles at either end of the edge belong to one fan.
      const same = triangle[first] === triangle[other];
      corners.join(first, same ? other : nextHalf(other));
      corners.join(nextHalf(first), same ? nextHalf(other) : other);
    }
  }
  const number = new Int32Array(faces).fill(-1);
  const ofTriangle = new Int32Array(faces);
  let count = 0;
  for (let f = 0; f < faces; f++) {
    const top = joined.find(f);
    if (number[top]! < 0) number[top] = count++;
    ofTriangle[f] = number[top]!;
  }
  const euler = new Int32Array(count);
  const volume = new Float64Array(count);
  const fans = new Int32Array(vertices);
  for (let c = 0; c < triangle.length; c++) {
    if (corners.find(c) !== c) continue;
    fans[triangle[c]!]!++;
    // A fan is a vertex of its component, even where two components touch in a point.
    euler[ofTriangle[Math.floor(c / 3)]!]!++;
  }
  for (let e = 0; e < edges.count; e++) euler[ofTriangle[Math.floor(edges.side[edges.sideStart[e]!]! / 3)]!]!--;
  for (let f = 0; f < faces; f++) {
    const component = ofTriangle[f]!;
    euler[component]!++;
    volume[component]! += sixfoldVolume(position, triangle, f) / 6;
  }
  return { count, ofTriangle, euler, volume, fans };
}

/** Six times the signed volume between a triangle and the first vertex, which keeps the numbers small. */
function sixfoldVolume(position: Float64Array, triangle: Int32Array, face: number): number {
  const at = (k: number, axis: number) => position[3 * triangle[3 * face + k]! + axis]! - position[axis]!;
  return (
    at(0, 0) * (at(1, 1) * at(2, 2) - at(1, 2) * at(2, 1)) +
    at(0, 1) * (at(1, 2) * at(2, 0) - at(1, 0) * at(2, 2)) +
    at(0, 2) * (at(1, 0) * at(2, 1) - at(1, 1) * at(2, 0))
  );
}
