import { InvariantError } from '../core/errors.ts';
import type { LumenMesh } from '../mesh/lumen.ts';
import type { TubeLayout } from '../mesh/tube-layout.ts';
import type { Forest } from '../tree/forest.ts';
import { KeyMap } from './key-map.ts';

/** Which triangles of a lumen surface are the wall of which node. */
export interface NodeWalls {
  /** (n + 1) begin of each node's run in `triangle`. */
  readonly start: Int32Array;
  /** Rows of triangles. */
  readonly triangle: Int32Array;
}

/**
 * Sorts the triangles beyond the tubes by the node whose wall they are: they hang together by their edges up to the
 * rings, and the way a ring's edge is run tells on which side of the tube they are.
 *
 * @param rim (n) first corner of each vessel's first ring
 * @throws InvariantError where a wall has no ring
 * Cost:   O(triangles)
 */
export function sortNodeWalls(mesh: LumenMesh, forest: Forest, layout: TubeLayout, rim: Int32Array): NodeWalls {
  const { around, triangle } = mesh;
  let ringCorners = 0;
  let tubeTriangles = 0;
  for (let i = 0; i < forest.count; i++) {
    if (forest.parent[i]! < 0) continue;
    ringCorners += (layout.strips[i]! + 1) * around;
    tubeTriangles += 2 * layout.strips[i]! * around;
  }
  const faces = triangle.length / 3;
  const group = new Int32Array(faces);
  for (let t = 0; t < faces; t++) group[t] = t;
  const find = (t: number): number => {
    let at = t;
    while (group[at] !== at) {
      group[at] = group[group[at]!]!;
      at = group[at]!;
    }
    return at;
  };
  const node = new Int32Array(faces).fill(-1);
  const edges = new KeyMap();
  for (let t = tubeTriangles; t < faces; t++) {
    if (mesh.patch[t] !== 0) continue;
    for (let k = 0; k < 3; k++) {
      const a = triangle[3 * t + k]!;
      const b = triangle[3 * t + (k === 2 ? 0 : k + 1)]!;
      const end = a < ringCorners && b < ringCorners ? ringEdge(mesh, layout, rim, a, b) : 0;
      if (end !== 0) {
        const row = mesh.row[a]!;
        node[find(t)] = end > 0 ? row : forest.parent[row]!;
        continue;
      }
      const other = edges.get(b, a, 0);
      if (other < 0) edges.add(a, b, 0, t);
      else {
        const known = Math.max(node[find(t)]!, node[find(other)]!);
        group[find(t)] = find(other);
        node[find(other)] = known;
      }
    }
  }
  const start = new Int32Array(forest.count + 1);
  for (let t = tubeTriangles; t < faces; t++) {
    if (mesh.patch[t] !== 0) continue;
    const row = node[find(t)]!;
    if (row < 0) throw new InvariantError(`sortNodeWalls: triangle ${t} belongs to no node`);
    start[row + 1]!++;
  }
  for (let i = 0; i < forest.count; i++) start[i + 1]! += start[i]!;
  const fill = start.slice(0, forest.count);
  const sorted = new Int32Array(start[forest.count]!);
  for (let t = tubeTriangles; t < faces; t++) if (mesh.patch[t] === 0) sorted[fill[node[find(t)]!]!++] = t;
  return { start, triangle: sorted };
}

/** 1 where an edge of a node's wall lies on a vessel's last ring, −1 where on its first, 0 where it lies on none. */
function ringEdge(mesh: LumenMesh, layout: TubeLayout, rim: Int32Array, a: number, b: number): number {
  const { around } = mesh;
  const row = mesh.row[a]!;
  if (mesh.row[b] !== row) return 0;
  const i = a - rim[row]!;
  const j = b - rim[row]!;
  const ring = Math.floor(i / around);
  if (Math.floor(j / around) !== ring) return 0;
  const step = (j - i + around) % around;
  if (step !== 1 && step !== around - 1) return 0;
  const strips = layout.strips[row]!;
  if (strips > 0) return ring === 0 ? -1 : 1;
  return step === 1 ? 1 : -1;
}
