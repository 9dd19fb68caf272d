import type { Solids } from './solids.ts';

/** Triangles over corners that are merged where all three coordinates are equal. */
export interface Welded {
  /** (3v) */
  readonly position: Float64Array;
  /** (3f) */
  readonly triangle: Int32Array;
}

/** Merges equal corners. Cost: O(f) by hashing the coordinates' bits. */
export function weldCorners(solids: Solids): Welded {
  const { corner } = solids;
  const corners = corner.length / 3;
  let size = 16;
  while (size < 2 * corners) size *= 2;
  const table = new Int32Array(size).fill(-1);
  const position = new Float64Array(corner.length);
  const triangle = new Int32Array(corners);
  const bits = new Uint32Array(6);
  const reals = new Float64Array(bits.buffer);
  let vertices = 0;
  for (let c = 0; c < corners; c++) {
    // Adding 0 turns −0 into 0, which is the same place.
    const x = corner[3 * c]! + 0;
    const y = corner[3 * c + 1]! + 0;
    const z = corner[3 * c + 2]! + 0;
    reals[0] = x;
    reals[1] = y;
    reals[2] = z;
    let hash = 0x811c9dc5;
    for (let k = 0; k < 6; k++) hash = Math.imul(hash ^ bits[k]!, 0x9e3779b1) ^ (hash >>> 15);
    let slot = (hash >>> 0) & (size - 1);
    let vertex = table[slot]!;
    while (
      vertex >= 0 &&
      !(position[3 * vertex] === x && position[3 * vertex + 1] === y && position[3 * vertex + 2] === z)
    ) {
      slot = (slot + 1) & (size - 1);
      vertex = table[slot]!;
    }
    if (vertex < 0) {
      vertex = vertices++;
      table[slot] = vertex;
      position[3 * vertex] = x;
      position[3 * vertex + 1] = y;
      position[3 * vertex + 2] = z;
    }
    triangle[c] = vertex;
  }
  return { position: position.slice(0, 3 * vertices), triangle };
}
