import type { GrowingRows } from './growing-column.ts';

/**
 * Cuts a prism in three tetrahedra by the numbers of its corners, the same way on both sides of each face: every
 * quadrilateral from its least corner.
 *
 * Source: Dompierre, Labbé, Vallet, Camarero (1999), How to subdivide pyramids, prisms and hexahedra into tetrahedra.
 */
export function cutPrism(cells: Int32Array, at: number, out: GrowingRows): void {
  let first = 0;
  for (let k = 1; k < 6; k++) if (cells[at + k]! < cells[at + first]!) first = k;
  // The prism turned so that its least corner comes first, on its side too.
  const turn = TURNED[first]!;
  const v = (k: number): number => cells[at + turn[k]!]!;
  const start = out.take(12);
  const o = out.values;
  const put = (i: number, a: number, b: number, c: number, d: number): void => {
    o[start + i] = v(a);
    o[start + i + 1] = v(b);
    o[start + i + 2] = v(c);
    o[start + i + 3] = v(d);
  };
  if (Math.min(v(1), v(5)) < Math.min(v(2), v(4))) {
    put(0, 0, 1, 2, 5);
    put(4, 0, 1, 5, 4);
  } else {
    put(0, 0, 1, 2, 4);
    put(4, 0, 4, 2, 5);
  }
  put(8, 0, 4, 5, 3);
}

const TURNED = [
  [0, 1, 2, 3, 4, 5],
  [1, 2, 0, 4, 5, 3],
  [2, 0, 1, 5, 3, 4],
  [3, 5, 4, 0, 2, 1],
  [4, 3, 5, 1, 0, 2],
  [5, 4, 3, 2, 1, 0],
] as const;

/** Cuts a pyramid in two tetrahedra, its base from its least corner. */
export function cutPyramid(cells: Int32Array, at: number, out: GrowingRows): void {
  const [a, b, c, d, e] = [cells[at]!, cells[at + 1]!, cells[at + 2]!, cells[at + 3]!, cells[at + 4]!];
  const start = out.take(8);
  if (Math.min(a, c) < Math.min(b, d)) out.values.set([a, b, c, e, a, c, d, e], start);
  else out.values.set([a, b, d, e, b, c, d, e], start);
}
