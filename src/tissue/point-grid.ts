/**
 * Points added one by one, and the question whether any lies nearer than a given distance.
 *
 * Cells of one edge length in a hash table of chains; cells next to each other along z sit next to each other in the
 * table, so that looking round a point touches nine places of memory, not twenty-seven; a point and its link in the chain
 * share 32 bytes for the same reason (at 10⁶ points nearly every look is a cache miss).
 */
export interface PointGrid {
  readonly count: number;
  /** (3·count) m; a copy. */
  positions(): Float64Array;
  add(x: number, y: number, z: number): void;
  /** True if a point lies nearer than `reach` ≤ the cell edge. */
  crowded(x: number, y: number, z: number, reach: number): boolean;
  /** Sorts all points into cells of a new edge; called with ever smaller edges as points get denser. O(count). */
  refine(edge: number): void;
  readonly edge: number;
}

/** @param edge m, > 0; edge of the first cells */
export function createPointGrid(edge: number): PointGrid {
  let cell = edge;
  let inverse = 1 / edge;
  let count = 0;
  // Four a point: x, y, z, row of the next point of the chain or −1.
  let entry = new Float64Array(4 * 1024);
  let mask = 4095;
  let head = new Int32Array(mask + 1).fill(-1);

  function slot(i: number, j: number, k: number): number {
    return ((Math.imul(i, 0x9e3779b1) ^ Math.imul(j, 0x85ebca6b)) + k) & mask;
  }

  function insert(row: number): void {
    const i = Math.floor(entry[4 * row]! * inverse);
    const j = Math.floor(entry[4 * row + 1]! * inverse);
    const k = Math.floor(entry[4 * row + 2]! * inverse);
    const at = slot(i, j, k);
    entry[4 * row + 3] = head[at]!;
    head[at] = row;
  }

  function rebuild(): void {
    let size = mask + 1;
    while (size < entry.length / 2) size *= 2;
    if (size === mask + 1) head.fill(-1);
    else head = new Int32Array(size).fill(-1);
    mask = size - 1;
    for (let row = 0; row < count; row++) insert(row);
  }

  function chainCrowded(at: number, x: number, y: number, z: number, squared: number): boolean {
    for (let row = head[at]!; row >= 0; row = entry[4 * row + 3]! | 0) {
      const dx = entry[4 * row]! - x;
      const dy = entry[4 * row + 1]! - y;
      const dz = entry[4 * row + 2]! - z;
      if (dx * dx + dy * dy + dz * dz < squared) return true;
    }
    return false;
  }

  return {
    get count() {
      return count;
    },
    positions() {
      const out = new Float64Array(3 * count);
      for (let row = 0; row < count; row++)
        for (let axis = 0; axis < 3; axis++) out[3 * row + axis] = entry[4 * row + axis]!;
      return out;
    },
    get edge() {
      return cell;
    },
    add(x, y, z) {
      if (4 * count === entry.length) {
        // By half, not double: at 10⁷ points the old and the new array live side by side for a moment.
        const grown = new Float64Array(4 * (count + (count >> 1)));
        grown.set(entry);
        entry = grown;
        rebuild();
      }
      entry[4 * count] = x;
      entry[4 * count + 1] = y;
      entry[4 * count + 2] = z;
      insert(count);
      count++;
    },
    crowded(x, y, z, reach) {
      const squared = reach * reach;
      const fx = x * inverse;
      const fy = y * inverse;
      const fz = z * inverse;
      const i = Math.floor(fx);
      const j = Math.floor(fy);
      const k = Math.floor(fz);
      // The own cell first: it settles most refusals.
      if (chainCrowded(slot(i, j, k), x, y, z, squared)) return true;
      const near = reach * inverse;
      const i0 = Math.floor(fx - near);
      const i1 = Math.floor(fx + near);
      const j0 = Math.floor(fy - near);
      const j1 = Math.floor(fy + near);
      const k0 = Math.floor(fz - near);
      const k1 = Math.floor(fz + near);
      for (let a = i0; a <= i1; a++)
        for (let b = j0; b <= j1; b++)
          for (let c = k0; c <= k1; c++) {
            if (a === i && b === j && c === k) continue;
            if (chainCrowded(slot(a, b, c), x, y, z, squared)) return true;
          }
      return false;
    },
    refine(edge) {
      cell = edge;
      inverse = 1 / edge;
      rebuild();
    },
  };
}
