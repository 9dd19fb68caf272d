import type { TriangleSurface } from '../core/surface.ts';

/**
 * Which triangle lies across each edge. Half-edge e = 3t + k runs from corner k to corner k + 1 of triangle t.
 */
export interface SurfaceTopology {
  /** (3f) the half-edge on the other side; −1 where there is none or more than one, or the triangle repeats a corner. */
  readonly twin: Int32Array;
  /** Half-edges that no other triangle shares; edges that three or more share; edges run the same way by both. One half-edge each. */
  readonly open: number[];
  readonly crowded: number[];
  readonly opposed: number[];
}

/** @returns corner where half-edge e ends */
export function edgeEnd(triangle: Int32Array, e: number): number {
  return triangle[e % 3 === 2 ? e - 2 : e + 1]!;
}

/**
 * Pairs half-edges by their two corners.
 *
 * @param surface corner rows in range
 * Cost: O(f + v): two counting sorts.
 */
export function surfaceTopology(surface: TriangleSurface): SurfaceTopology {
  const { triangle } = surface;
  const corners = surface.position.length / 3;
  const half = triangle.length;
  const low = new Int32Array(half);
  const high = new Int32Array(half);
  const used: number[] = [];
  for (let e = 0; e < half; e++) {
    const t = e - (e % 3);
    const [a, b, c] = [triangle[t]!, triangle[t + 1]!, triangle[t + 2]!];
    if (a === b || b === c || c === a) continue;
    const from = triangle[e]!;
    const to = edgeEnd(triangle, e);
    low[e] = from < to ? from : to;
    high[e] = from < to ? to : from;
    used.push(e);
  }
  const sorted = countingSort(countingSort(Int32Array.from(used), high, corners), low, corners);
  const twin = new Int32Array(half).fill(-1);
  const open: number[] = [];
  const crowded: number[] = [];
  const opposed: number[] = [];
  for (let i = 0; i < sorted.length; ) {
    const e = sorted[i]!;
    let j = i + 1;
    while (j < sorted.length && low[sorted[j]!] === low[e] && high[sorted[j]!] === high[e]) j++;
    if (j - i === 1) open.push(e);
    else if (j - i > 2) crowded.push(e);
    else {
      const other = sorted[i + 1]!;
      twin[e] = other;
      twin[other] = e;
      if (triangle[e] === triangle[other]) opposed.push(e);
    }
    i = j;
  }
  return { twin, open, crowded, opposed };
}

function countingSort(rows: Int32Array, key: Int32Array, keys: number): Int32Array {
  const start = new Int32Array(keys + 1);
  for (let i = 0; i < rows.length; i++) start[key[rows[i]!]! + 1]!++;
  for (let k = 0; k < keys; k++) start[k + 1]! += start[k]!;
  const out = new Int32Array(rows.length);
  for (let i = 0; i < rows.length; i++) {
    const row = rows[i]!;
    out[start[key[row]!]!++] = row;
  }
  return out;
}

/**
 * Shell of each triangle: pieces connected across edges, numbered from 0 by their first triangle.
 *
 * @returns (f) shell of each triangle, and how many there are
 */
export function surfaceShells(topology: SurfaceTopology): { readonly shell: Int32Array; readonly count: number } {
  const { twin } = topology;
  const shell = new Int32Array(twin.length / 3).fill(-1);
  const stack: number[] = [];
  let count = 0;
  for (let first = 0; first < shell.length; first++) {
    if (shell[first] !== -1) continue;
    shell[first] = count;
    stack.push(first);
    while (stack.length > 0) {
      const t = stack.pop()!;
      for (let k = 0; k < 3; k++) {
        const other = twin[3 * t + k]!;
        if (other < 0) continue;
        const next = (other - (other % 3)) / 3;
        if (shell[next] !== -1) continue;
        shell[next] = count;
        stack.push(next);
      }
    }
    count++;
  }
  return { shell, count };
}

/**
 * Corners at which the triangles form more than one fan, so that the surface pinches itself in a point.
 *
 * @param topology of a surface without open, crowded or opposed edges
 */
export function pinchedCorners(surface: TriangleSurface, topology: SurfaceTopology): number[] {
  const { triangle } = surface;
  const { twin } = topology;
  const corners = surface.position.length / 3;
  const uses = new Int32Array(corners);
  const start = new Int32Array(corners).fill(-1);
  for (let e = 0; e < triangle.length; e++) {
    uses[triangle[e]!]!++;
    if (start[triangle[e]!] === -1) start[triangle[e]!] = e;
  }
  const out: number[] = [];
  for (let v = 0; v < corners; v++) {
    const first = start[v]!;
    if (first < 0) continue;
    let e = first;
    let seen = 0;
    // From half-edge v→w over its twin w→v to the half-edge that leaves v in that triangle.
    do {
      seen++;
      const back = twin[e]!;
      if (back < 0) break;
      e = back % 3 === 2 ? back - 2 : back + 1;
    } while (e !== first && seen <= uses[v]!);
    if (seen !== uses[v]) out.push(v);
  }
  return out;
}
