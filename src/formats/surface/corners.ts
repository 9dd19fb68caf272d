import type { TriangleSurface } from '../../core/surface.ts';

/**
 * Merges corners that are equal in all three coordinates (−0 equals 0) and drops those no triangle uses.
 *
 * @param corner   (3c) coordinates
 * @param triangle (3f) rows of `corner`, in range
 * @returns        corners in order of first use; as many triangles as given, in the same order
 * Cost:           O(c + f) with a hash table of 8 bytes a corner.
 */
export function mergeCorners(corner: ArrayLike<number>, triangle: ArrayLike<number>): TriangleSurface {
  const given = corner.length / 3;
  let size = 16;
  while (size < 2 * given) size *= 2;
  const mask = size - 1;
  const table = new Int32Array(size).fill(-1);
  const merged = new Int32Array(given).fill(-1);
  const position = new Float64Array(corner.length);
  const key = new Float64Array(3);
  const bits = new Int32Array(key.buffer);
  let count = 0;

  function mergedRow(row: number): number {
    // Adding 0 turns −0 into 0.
    const x = corner[3 * row]! + 0;
    const y = corner[3 * row + 1]! + 0;
    const z = corner[3 * row + 2]! + 0;
    key[0] = x;
    key[1] = y;
    key[2] = z;
    let hash = 0x811c9dc5;
    for (let i = 0; i < 6; i++) {
      hash = Math.imul(hash ^ bits[i]!, 0x01000193);
      hash ^= hash >>> 15;
    }
    hash = Math.imul(hash, 0x2c1b3c6d);
    hash ^= hash >>> 13;
    for (let slot = hash & mask; ; slot = (slot + 1) & mask) {
      const known = table[slot]!;
      if (known < 0) {
        table[slot] = count;
        position[3 * count] = x;
        position[3 * count + 1] = y;
        position[3 * count + 2] = z;
        return count++;
      }
      if (position[3 * known] === x && position[3 * known + 1] === y && position[3 * known + 2] === z) return known;
    }
  }

  const out = new Int32Array(triangle.length);
  for (let i = 0; i < triangle.length; i++) {
    const row = triangle[i]!;
    if (merged[row] === -1) merged[row] = mergedRow(row);
    out[i] = merged[row]!;
  }
  return { position: position.slice(0, 3 * count), triangle: out };
}
