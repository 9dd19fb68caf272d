/** Items and nodes that a node holds. */
export const FAN = 4;
/** More than the spacing of float32 numbers relative to their size, 2⁻²³. */
const HAIR = 1.3e-7;

/**
 * A hierarchy of boxes over items of any size, for overlap and nearest queries.
 *
 * Items stand in Z-order of their box centres ("slots"); node k of level 0 bounds slots 4k … 4k + 3, node k of the next
 * level bounds nodes 4k … 4k + 3 of this one, up to one node at the top. Nothing but slots and boxes is kept, so that
 * 2·10⁶ vessels take some 40 MB; a leaf's items are handed out untested.
 */
export interface BoxTree {
  readonly count: number;
  /** (n) item in each slot. */
  readonly item: Int32Array;
  /** (levels + 1) first node of each level, level 0 first. */
  readonly levelStart: Int32Array;
  /** (6 × nodes) x, y, z of the low corner, then of the high. */
  readonly box: Float64Array;
}

/** Writes the box of an item to out[0…5]. */
export type BoxOf = (item: number, out: Float64Array) => void;

/**
 * Builds the hierarchy. All boxes must be finite.
 *
 * @param slotBox (6 n) filled with the box of each slot's item, rounded outwards; may be left out
 * Cost: O(n), two counting passes.
 */
export function buildBoxTree(count: number, boxOf: BoxOf, slotBox?: Float32Array): BoxTree {
  const one = new Float64Array(6);
  const low = [Infinity, Infinity, Infinity];
  const high = [-Infinity, -Infinity, -Infinity];
  for (let i = 0; i < count; i++) {
    boxOf(i, one);
    for (let k = 0; k < 3; k++) {
      const middle = 0.5 * (one[k]! + one[k + 3]!);
      if (middle < low[k]!) low[k] = middle;
      if (middle > high[k]!) high[k] = middle;
    }
  }
  const extent = Math.max(high[0]! - low[0]!, high[1]! - low[1]!, high[2]! - low[2]!);
  const scale = extent > 0 ? 1023 / extent : 0;
  const code = new Uint32Array(count);
  for (let i = 0; i < count; i++) {
    boxOf(i, one);
    let bits = 0;
    for (let k = 0; k < 3; k++) {
      bits |= spread(Math.floor((0.5 * (one[k]! + one[k + 3]!) - low[k]!) * scale)) << k;
    }
    code[i] = bits;
  }
  const item = sortByCode(code);

  const starts = [0];
  let size = count;
  do {
    size = Math.ceil(size / FAN);
    starts.push(starts.at(-1)! + size);
  } while (size > 1);
  const levelStart = Int32Array.from(starts);
  const box = new Float64Array(6 * levelStart.at(-1)!);
  for (let at = 0; at < box.length; at += 6) {
    for (let k = 0; k < 3; k++) {
      box[at + k] = Infinity;
      box[at + k + 3] = -Infinity;
    }
  }
  for (let slot = 0; slot < count; slot++) {
    boxOf(item[slot]!, one);
    grow(box, 6 * (slot >> 2), one, 0);
    if (slotBox === undefined) continue;
    for (let k = 0; k < 3; k++) {
      slotBox[6 * slot + k] = one[k]! - HAIR * Math.abs(one[k]!);
      slotBox[6 * slot + k + 3] = one[k + 3]! + HAIR * Math.abs(one[k + 3]!);
    }
  }
  for (let level = 1; level + 1 < levelStart.length; level++) {
    const below = levelStart[level - 1]!;
    for (let node = below; node < levelStart[level]!; node++) {
      grow(box, 6 * (levelStart[level]! + ((node - below) >> 2)), box, 6 * node);
    }
  }
  return { count, item, levelStart, box };
}

/** Spreads ten bits so that two zeros follow each. */
function spread(value: number): number {
  let x = value & 1023;
  x = (x | (x << 16)) & 0x030000ff;
  x = (x | (x << 8)) & 0x0300f00f;
  x = (x | (x << 4)) & 0x030c30c3;
  return (x | (x << 2)) & 0x09249249;
}

/** Items in ascending order of a 30-bit code, ties by item. */
function sortByCode(code: Uint32Array): Int32Array {
  const n = code.length;
  let from = new Int32Array(n);
  let to = new Int32Array(n);
  for (let i = 0; i < n; i++) from[i] = i;
  for (const shift of [0, 15]) {
    const start = new Int32Array(32769);
    for (let i = 0; i < n; i++) start[((code[i]! >>> shift) & 32767) + 1]!++;
    for (let b = 0; b < 32768; b++) start[b + 1]! += start[b]!;
    for (let i = 0; i < n; i++) to[start[(code[from[i]!]! >>> shift) & 32767]!++] = from[i]!;
    const swap = from;
    from = to;
    to = swap;
  }
  return from;
}

function grow(into: Float64Array, at: number, from: Float64Array, off: number): void {
  for (let k = 0; k < 3; k++) {
    if (from[off + k]! < into[at + k]!) into[at + k] = from[off + k]!;
    if (from[off + k + 3]! > into[at + k + 3]!) into[at + k + 3] = from[off + k + 3]!;
  }
}

/** Room for a traversal: three waiting children a level, and levels ≤ 16. */
export function traversalStack(): Int32Array {
  return new Int32Array(128);
}

/**
 * Calls `visit` for every slot ≥ `firstSlot` whose leaf box meets the given box.
 *
 * @param query (6) low and high corner
 * @param stack scratch from `traversalStack`; level and node in one number
 */
export function visitOverlaps(
  tree: BoxTree,
  query: Float64Array,
  firstSlot: number,
  stack: Int32Array,
  visit: (slot: number) => void,
): void {
  if (tree.count === 0) return;
  const { levelStart, box } = tree;
  const levels = levelStart.length - 1;
  let top = 0;
  stack[top++] = levels - 1;
  stack[top++] = 0;
  while (top > 0) {
    const node = stack[--top]!;
    const level = stack[--top]!;
    const at = 6 * (levelStart[level]! + node);
    if (
      box[at]! > query[3]! ||
      box[at + 3]! < query[0]! ||
      box[at + 1]! > query[4]! ||
      box[at + 4]! < query[1]! ||
      box[at + 2]! > query[5]! ||
      box[at + 5]! < query[2]!
    )
      continue;
    if (level === 0) {
      const end = Math.min(FAN * node + FAN, tree.count);
      for (let slot = Math.max(FAN * node, firstSlot); slot < end; slot++) visit(slot);
      continue;
    }
    const size = levelStart[level]! - levelStart[level - 1]!;
    const first = FAN * node;
    for (let child = Math.min(first + FAN, size) - 1; child >= first; child--) {
      // Last slot of the child's run: all of them before the first wanted one are done.
      if (((child + 1) << (2 * level)) - 1 < firstSlot) continue;
      stack[top++] = level - 1;
      stack[top++] = child;
    }
  }
}

/** How far apart boxes may be to be of interest; whoever visits them may lower it on the way. */
export interface Reach {
  /** m, ≥ 0 */
  margin: number;
}

/**
 * Calls `visit` for every two leaves (and every leaf with itself) whose boxes may come within the reach of one another
 * along each axis, the first never after the second. Leaf k holds the slots `FAN` · k to `FAN` · k + `FAN` − 1.
 *
 * Both go down the hierarchy together, so that what lies far apart is told so once for all that it holds.
 */
export function visitNearLeaves(tree: BoxTree, reach: Reach, visit: (one: number, other: number) => void): void {
  if (tree.count === 0) return;
  const { levelStart, box } = tree;
  // Sixteen pairs a level at most, three numbers each, and levels ≤ 16.
  const stack = new Int32Array(1024);
  let top = 3;
  stack[0] = levelStart.length - 2;
  while (top > 0) {
    const b = stack[--top]!;
    const a = stack[--top]!;
    const level = stack[--top]!;
    if (level === 0) {
      visit(a, b);
      continue;
    }
    const below = levelStart[level - 1]!;
    const size = levelStart[level]! - below;
    const endA = Math.min(FAN * a + FAN, size);
    const endB = Math.min(FAN * b + FAN, size);
    for (let i = endA - 1; i >= FAN * a; i--) {
      const at = 6 * (below + i);
      const { margin } = reach;
      const x0 = box[at]! - margin;
      const y0 = box[at + 1]! - margin;
      const z0 = box[at + 2]! - margin;
      const x1 = box[at + 3]! + margin;
      const y1 = box[at + 4]! + margin;
      const z1 = box[at + 5]! + margin;
      for (let j = endB - 1; j >= FAN * b; j--) {
        if (j < i) break;
        const to = 6 * (below + j);
        if (box[to]! > x1 || box[to + 3]! < x0 || box[to + 1]! > y1 || box[to + 4]! < y0) continue;
        if (box[to + 2]! > z1 || box[to + 5]! < z0) continue;
        stack[top++] = level - 1;
        stack[top++] = i;
        stack[top++] = j;
      }
    }
  }
}

/** Squared distance from a point to a node's box; 0 inside. */
function squaredDistanceToNode(box: Float64Array, at: number, x: number, y: number, z: number): number {
  const dx = Math.max(box[at]! - x, 0, x - box[at + 3]!);
  const dy = Math.max(box[at + 1]! - y, 0, y - box[at + 4]!);
  const dz = Math.max(box[at + 2]! - z, 0, z - box[at + 5]!);
  return dx * dx + dy * dy + dz * dz;
}

/**
 * Least squared distance from a point to any item.
 *
 * @param squaredDistance to one item, given its number
 * @returns m²; Infinity for an empty tree
 */
export function nearestSquaredDistance(
  tree: BoxTree,
  x: number,
  y: number,
  z: number,
  stack: Int32Array,
  squaredDistance: (item: number) => number,
): number {
  if (tree.count === 0) return Infinity;
  const { levelStart, box, item } = tree;
  let best = Infinity;
  let top = 0;
  stack[top++] = levelStart.length - 2;
  stack[top++] = 0;
  const near = [0, 0, 0, 0];
  while (top > 0) {
    const node = stack[--top]!;
    const level = stack[--top]!;
    if (squaredDistanceToNode(box, 6 * (levelStart[level]! + node), x, y, z) >= best) continue;
    if (level === 0) {
      const end = Math.min(FAN * node + FAN, tree.count);
      for (let slot = FAN * node; slot < end; slot++) {
        const d = squaredDistance(item[slot]!);
        if (d < best) best = d;
      }
      continue;
    }
    const size = levelStart[level]! - levelStart[level - 1]!;
    const first = FAN * node;
    const count = Math.min(FAN, size - first);
    for (let k = 0; k < count; k++) {
      near[k] = squaredDistanceToNode(box, 6 * (levelStart[level - 1]! + first + k), x, y, z);
    }
    // Farthest first on the stack, so that the nearest is looked at next.
    for (let done = 0; done < count; done++) {
      let far = 0;
      for (let k = 1; k < count; k++) if (near[k]! > near[far]!) far = k;
      if (near[far]! < best) {
        stack[top++] = level - 1;
        stack[top++] = first + far;
      }
      near[far] = -1;
    }
  }
  return best;
}
