import { buildBoxTree, traversalStack, visitOverlaps } from '../box-tree.ts';
import { areaSign, volumeSign } from './signs.ts';
import type { Welded } from './weld.ts';

/**
 * Finds triangles that meet where they share no corner or edge.
 *
 * Exact signs of volumes decide, so flat caps, whose triangles are coplanar but for the digits written, are judged by
 * what the file says and not by rounding. Coplanar triangles are compared in the plane; touching counts as meeting.
 *
 * @param found called for every pair, lower triangle first
 * Cost: O(f log f) for triangles that are small against the surface.
 */
export function findCrossings(mesh: Welded, found: (first: number, second: number) => void): void {
  const { position, triangle } = mesh;
  const faces = triangle.length / 3;
  const boxOf = (face: number, out: Float64Array) => {
    for (let k = 0; k < 3; k++) {
      const a = position[3 * triangle[3 * face]! + k]!;
      const b = position[3 * triangle[3 * face + 1]! + k]!;
      const c = position[3 * triangle[3 * face + 2]! + k]!;
      out[k] = Math.min(a, b, c);
      out[k + 3] = Math.max(a, b, c);
    }
  };
  const tree = buildBoxTree(faces, boxOf);
  const stack = traversalStack();
  const query = new Float64Array(6);
  const box = new Float64Array(6);
  let face = 0;
  const meet = (slot: number) => {
    const other = tree.item[slot]!;
    boxOf(other, box);
    for (let k = 0; k < 3; k++) if (box[k]! > query[k + 3]! || box[k + 3]! < query[k]!) return;
    if (trianglesCross(position, triangle, face, other)) found(Math.min(face, other), Math.max(face, other));
  };
  for (let slot = 0; slot < faces; slot++) {
    face = tree.item[slot]!;
    boxOf(face, query);
    visitOverlaps(tree, query, slot + 1, stack, meet);
  }
}

/** Do two triangles meet elsewhere than in the corners they share? */
export function trianglesCross(position: Float64Array, triangle: Int32Array, f: number, g: number): boolean {
  const shared: number[] = [];
  const ownF: number[] = [];
  const ownG: number[] = [];
  for (let k = 0; k < 3; k++) {
    const v = triangle[3 * f + k]!;
    const inG = v === triangle[3 * g] || v === triangle[3 * g + 1] || v === triangle[3 * g + 2];
    (inG ? shared : ownF).push(v);
  }
  for (let k = 0; k < 3; k++) {
    const v = triangle[3 * g + k]!;
    if (!shared.includes(v)) ownG.push(v);
  }
  const edge = (p: number, q: number, face: number) =>
    edgeMeets(position, p, q, triangle[3 * face]!, triangle[3 * face + 1]!, triangle[3 * face + 2]!);
  if (shared.length === 0) {
    const [a, b, c] = ownF as [number, number, number];
    const [d, e, h] = ownG as [number, number, number];
    const df = volumeSign(position, a, b, c, d);
    const ef = volumeSign(position, a, b, c, e);
    const hf = volumeSign(position, a, b, c, h);
    if (df === ef && ef === hf && df !== 0) return false;
    return edge(a, b, g) || edge(b, c, g) || edge(c, a, g) || edge(d, e, f) || edge(e, h, f) || edge(h, d, f);
  }
  // From a shared corner, an overlap runs on to the far edge of one of the two.
  if (shared.length === 1) return edge(ownF[0]!, ownF[1]!, g) || edge(ownG[0]!, ownG[1]!, f);
  // Across a shared edge only triangles folded onto each other overlap.
  if (shared.length === 2) {
    const [u, v] = shared as [number, number];
    if (volumeSign(position, u, v, ownF[0]!, ownG[0]!) !== 0) return false;
    const axis = widestAxis(position, u, v, ownF[0]!);
    return areaSign(position, axis, u, v, ownF[0]!) === areaSign(position, axis, u, v, ownG[0]!);
  }
  return true;
}

/** Does the edge p–q meet the triangle a, b, c? They share no corner. */
function edgeMeets(position: Float64Array, p: number, q: number, a: number, b: number, c: number): boolean {
  const atP = volumeSign(position, a, b, c, p);
  const atQ = volumeSign(position, a, b, c, q);
  if (atP * atQ > 0) return false;
  if (atP === 0 && atQ === 0) return edgeMeetsInPlane(position, p, q, a, b, c);
  const ab = volumeSign(position, p, q, a, b);
  const bc = volumeSign(position, p, q, b, c);
  const ca = volumeSign(position, p, q, c, a);
  const some = ab > 0 || bc > 0 || ca > 0;
  return !(some && (ab < 0 || bc < 0 || ca < 0));
}

function edgeMeetsInPlane(position: Float64Array, p: number, q: number, a: number, b: number, c: number): boolean {
  const axis = widestAxis(position, a, b, c);
  for (const [d, e] of [
    [a, b],
    [b, c],
    [c, a],
  ] as const) {
    const crossP = areaSign(position, axis, p, q, d) * areaSign(position, axis, p, q, e);
    const crossQ = areaSign(position, axis, d, e, p) * areaSign(position, axis, d, e, q);
    if (crossP < 0 && crossQ < 0) return true;
    if (crossP <= 0 && crossQ <= 0 && boxesMeet(position, p, q, d, e)) return true;
  }
  const ab = areaSign(position, axis, a, b, p);
  return ab === areaSign(position, axis, b, c, p) && ab === areaSign(position, axis, c, a, p);
}

function boxesMeet(position: Float64Array, p: number, q: number, d: number, e: number): boolean {
  for (let k = 0; k < 3; k++) {
    const [x, y] = [position[3 * p + k]!, position[3 * q + k]!];
    const [z, w] = [position[3 * d + k]!, position[3 * e + k]!];
    if (Math.max(x, y) < Math.min(z, w) || Math.max(z, w) < Math.min(x, y)) return false;
  }
  return true;
}

/** Coordinate axis along which the triangle looks widest. */
function widestAxis(position: Float64Array, a: number, b: number, c: number): number {
  const at = (row: number, k: number) => position[3 * row + k]! - position[3 * a + k]!;
  const nx = Math.abs(at(b, 1) * at(c, 2) - at(b, 2) * at(c, 1));
  const ny = Math.abs(at(b, 2) * at(c, 0) - at(b, 0) * at(c, 2));
  const nz = Math.abs(at(b, 0) * at(c, 1) - at(b, 1) * at(c, 0));
  return nx >= ny && nx >= nz ? 0 : ny >= nz ? 1 : 2;
}
