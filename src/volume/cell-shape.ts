/** Local corners of the faces of a tetrahedron, a pyramid and a prism, counter-clockwise seen from outside. */
export const TETRAHEDRON_FACES = [
  [1, 2, 3],
  [0, 3, 2],
  [0, 1, 3],
  [0, 2, 1],
] as const;
export const PYRAMID_FACES = [
  [0, 3, 2, 1],
  [0, 1, 4],
  [1, 2, 4],
  [2, 3, 4],
  [3, 0, 4],
] as const;
export const PRISM_FACES = [
  [0, 2, 1],
  [3, 4, 5],
  [0, 1, 4, 3],
  [1, 2, 5, 4],
  [2, 0, 3, 5],
] as const;

/** Corners at which a cell's Jacobian is taken, each with three neighbours in right-handed order. */
const TETRAHEDRON_CORNERS = [0, 1, 2, 3, 1, 2, 0, 3, 2, 0, 1, 3, 3, 1, 0, 2];
const PYRAMID_CORNERS = [0, 1, 3, 4, 1, 2, 0, 4, 2, 3, 1, 4, 3, 0, 2, 4];
const PRISM_CORNERS = [0, 1, 2, 3, 1, 2, 0, 4, 2, 0, 1, 5, 3, 5, 4, 0, 4, 3, 5, 1, 5, 4, 3, 2];

/** The kinds of cells, in the order of LumenVolume's columns. */
export const CELL_KINDS = [
  // The scale makes 1 of a cell whose edges are all of one length.
  { name: 'tetrahedron', size: 4, faces: TETRAHEDRON_FACES, corners: TETRAHEDRON_CORNERS, scale: Math.SQRT2 },
  { name: 'pyramid', size: 5, faces: PYRAMID_FACES, corners: PYRAMID_CORNERS, scale: Math.SQRT2 },
  { name: 'prism', size: 6, faces: PRISM_FACES, corners: PRISM_CORNERS, scale: 2 / Math.sqrt(3) },
] as const;

export type CellKind = (typeof CELL_KINDS)[number];

/**
 * Least scaled Jacobian of a cell: at each corner the volume that three edges span, over that of their lengths; 1 for a
 * cell whose edges are all of one length. A tetrahedron's is taken over the largest of the corners' lengths, which is the same as
 * the least of the corners.
 *
 * @param at of the first corner in `cells`
 */
export function scaledJacobian(position: Float64Array, cells: Int32Array, at: number, kind: CellKind): number {
  const { corners, scale } = kind;
  let least = Infinity;
  for (let i = 0; i < corners.length; i += 4) {
    const a = 3 * cells[at + corners[i]!]!;
    const b = 3 * cells[at + corners[i + 1]!]!;
    const c = 3 * cells[at + corners[i + 2]!]!;
    const d = 3 * cells[at + corners[i + 3]!]!;
    const x = position[a]!;
    const y = position[a + 1]!;
    const z = position[a + 2]!;
    const ux = position[b]! - x;
    const uy = position[b + 1]! - y;
    const uz = position[b + 2]! - z;
    const vx = position[c]! - x;
    const vy = position[c + 1]! - y;
    const vz = position[c + 2]! - z;
    const wx = position[d]! - x;
    const wy = position[d + 1]! - y;
    const wz = position[d + 2]! - z;
    const spanned = (uy * vz - uz * vy) * wx + (uz * vx - ux * vz) * wy + (ux * vy - uy * vx) * wz;
    const lengths = (ux * ux + uy * uy + uz * uz) * (vx * vx + vy * vy + vz * vz) * (wx * wx + wy * wy + wz * wz);
    const value = lengths > 0 ? spanned / Math.sqrt(lengths) : -1;
    if (!(value >= least)) least = value;
  }
  return scale * least;
}

/**
 * Volume of a cell, its quadrilaterals taken as bilinear patches: what shares such a face has it in common.
 *
 * @param at of the first corner in `cells`
 */
export function cellVolume(position: Float64Array, cells: Int32Array, at: number, kind: CellKind): number {
  const origin = 3 * cells[at]!;
  const six = (i: number, j: number, k: number): number => {
    const a = 3 * cells[at + i]!;
    const b = 3 * cells[at + j]!;
    const c = 3 * cells[at + k]!;
    const ux = position[a]! - position[origin]!;
    const uy = position[a + 1]! - position[origin + 1]!;
    const uz = position[a + 2]! - position[origin + 2]!;
    const vx = position[b]! - position[origin]!;
    const vy = position[b + 1]! - position[origin + 1]!;
    const vz = position[b + 2]! - position[origin + 2]!;
    const wx = position[c]! - position[origin]!;
    const wy = position[c + 1]! - position[origin + 1]!;
    const wz = position[c + 2]! - position[origin + 2]!;
    return (uy * vz - uz * vy) * wx + (uz * vx - ux * vz) * wy + (ux * vy - uy * vx) * wz;
  };
  let sum = 0;
  for (const face of kind.faces) {
    const [i, j, k] = face;
    if (face.length === 3) sum += six(i, j, k);
    else {
      // A bilinear patch lies halfway between its two ways of being cut in triangles.
      const l = face[3]!;
      sum += 0.5 * (six(i, j, k) + six(i, k, l) + six(i, j, l) + six(j, k, l));
    }
  }
  return sum / 6;
}
