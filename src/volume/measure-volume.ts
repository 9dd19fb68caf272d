import { CELL_KINDS, cellVolume, scaledJacobian } from './cell-shape.ts';
import { KeyMap } from './key-map.ts';
import type { LumenVolume } from './lumen-volume.ts';

export interface VolumeFigures {
  readonly points: number;
  readonly cells: number;
  readonly tetrahedra: number;
  readonly pyramids: number;
  readonly prisms: number;
  /** m³ */
  readonly volume: number;
  /** Least scaled Jacobian of all cells, and of each kind; Infinity where there is none of a kind. */
  readonly leastJacobian: number;
  readonly leastOf: { readonly tetrahedron: number; readonly pyramid: number; readonly prism: number };
  /** Cells whose scaled Jacobian is from 0 to 0.1, 0.1 to 0.2 … 0.9 to 1; those of 0 or less are not among them. */
  readonly histogram: readonly number[];
  /** Cells whose Jacobian is nowhere above 0 at some corner. */
  readonly turnedOver: number;
  /** Inner faces that not just two cells have, and outer ones that not just one cell and the surface have. */
  readonly unmatchedFaces: number;
}

/**
 * Measures a volume mesh.
 *
 * Cost: O(cells)
 */
export function measureVolume(volume: LumenVolume): VolumeFigures {
  const least = { tetrahedron: Infinity, pyramid: Infinity, prism: Infinity };
  const histogram = new Array<number>(10).fill(0);
  let turnedOver = 0;
  let sum = 0;
  for (const kind of CELL_KINDS) {
    const cells = volume[kind.name];
    for (let at = 0; at < cells.length; at += kind.size) {
      const value = scaledJacobian(volume.position, cells, at, kind);
      if (!(value >= least[kind.name])) least[kind.name] = value;
      if (value > 0) histogram[Math.min(9, Math.floor(10 * value))]!++;
      else turnedOver++;
      sum += cellVolume(volume.position, cells, at, kind);
    }
  }
  const [tetrahedra, pyramids, prisms] = CELL_KINDS.map(({ name, size }) => volume[name].length / size);
  return {
    points: volume.position.length / 3,
    cells: volume.vessel.length,
    tetrahedra: tetrahedra!,
    pyramids: pyramids!,
    prisms: prisms!,
    volume: sum,
    leastJacobian: Math.min(least.tetrahedron, least.pyramid, least.prism),
    leastOf: least,
    histogram,
    turnedOver,
    unmatchedFaces: countUnmatched(volume),
  };
}

/**
 * Faces that do not fit: each is run by two cells in opposite ways, or by one cell and by an outer face of the volume in
 * the same way.
 */
function countUnmatched(volume: LumenVolume): number {
  const map = new KeyMap();
  // Each face: its corners from the least on, the way it is run; −1 for the fourth of a triangle; how often each way.
  const runs: number[] = [];
  const see = (a: number, b: number, c: number, d: number, sign: number): void => {
    const [p, q, r, s] = fromLeast(a, b, c, d);
    const forwards = q < (s < 0 ? r : s);
    const [k, m] = forwards ? [q, s < 0 ? r : s] : [s < 0 ? r : s, q];
    // A quadrilateral is told from its least corner and the two next to it along its edges.
    const slot = map.get(p, k, m);
    const way = forwards ? sign : -sign;
    const other = s < 0 ? -1 : r;
    if (slot < 0) {
      map.add(p, k, m, runs.length);
      runs.push(other, way, 1);
    } else {
      if (runs[slot] !== other) runs[slot + 2]! += 100;
      runs[slot + 1]! += way;
      runs[slot + 2]!++;
    }
  };
  for (const kind of CELL_KINDS) {
    const cells = volume[kind.name];
    for (let at = 0; at < cells.length; at += kind.size) {
      for (const face of kind.faces) {
        const fourth = face.length === 3 ? -1 : cells[at + face[3]!]!;
        see(cells[at + face[0]]!, cells[at + face[1]]!, cells[at + face[2]]!, fourth, 1);
      }
    }
  }
  const { triangle, quad } = volume;
  for (let i = 0; i < triangle.length; i += 3) see(triangle[i]!, triangle[i + 1]!, triangle[i + 2]!, -1, -1);
  for (let i = 0; i < quad.length; i += 4) see(quad[i]!, quad[i + 1]!, quad[i + 2]!, quad[i + 3]!, -1);
  let unmatched = 0;
  for (let i = 0; i < runs.length; i += 3) if (runs[i + 1] !== 0 || runs[i + 2] !== 2) unmatched++;
  return unmatched;
}

/** Corners of a face turned so that the least comes first; d is −1 for a triangle. */
function fromLeast(a: number, b: number, c: number, d: number): [number, number, number, number] {
  if (d < 0) {
    if (a < b && a < c) return [a, b, c, -1];
    return b < c ? [b, c, a, -1] : [c, a, b, -1];
  }
  const least = Math.min(a, b, c, d);
  if (a === least) return [a, b, c, d];
  if (b === least) return [b, c, d, a];
  return c === least ? [c, d, a, b] : [d, a, b, c];
}
