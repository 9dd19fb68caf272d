import type { TriangleSurface } from '../core/surface.ts';

/** Boxes round ever smaller groups of triangles, in preorder: the first child of node i is node i + 1. */
export interface TriangleTree {
  /** (6n) least x, y, z, greatest x, y, z of each node's box. */
  readonly box: Float64Array;
  /** (n) of a leaf: first place in `order`; of an inner node: row of its second child. */
  readonly link: Int32Array;
  /** (n) triangles of a leaf; 0 for an inner node. */
  readonly size: Int32Array;
  /** (f) triangle rows, leaf by leaf. */
  readonly order: Int32Array;
}

const LEAF = 4;

/**
 * Halves the triangles at the median of their centres along the longest extent, until at most four are left.
 *
 * @param surface at least one triangle, finite corners
 * Cost: O(f log f); depth of the tree ⌈log₂ f⌉ whatever the triangles look like.
 */
export function buildTriangleTree(surface: TriangleSurface): TriangleTree {
  const { position, triangle } = surface;
  const count = triangle.length / 3;
  const centre = new Float64Array(3 * count);
  for (let t = 0; t < count; t++) {
    for (let axis = 0; axis < 3; axis++) {
      let sum = 0;
      for (let k = 0; k < 3; k++) sum += position[3 * triangle[3 * t + k]! + axis]!;
      centre[3 * t + axis] = sum;
    }
  }
  const order = Int32Array.from({ length: count }, (_, t) => t);
  const box = new Float64Array(6 * (count + 1));
  const link = new Int32Array(count + 1);
  const size = new Int32Array(count + 1);
  // (first, end, parent whose second child this is or −1) of each group still to be made a node.
  const stack = [0, count, -1];
  let nodes = 0;
  while (stack.length > 0) {
    const parent = stack.pop()!;
    const end = stack.pop()!;
    const first = stack.pop()!;
    const node = nodes++;
    if (parent >= 0) link[parent] = node;
    boundGroup(position, triangle, order, first, end, box, 6 * node);
    if (end - first <= LEAF) {
      link[node] = first;
      size[node] = end - first;
      continue;
    }
    const axis = longestAxis(centre, order, first, end);
    const middle = (first + end) >> 1;
    selectMedian(centre, axis, order, first, end - 1, middle);
    stack.push(middle, end, node, first, middle, -1);
  }
  return { box: box.slice(0, 6 * nodes), link: link.slice(0, nodes), size: size.slice(0, nodes), order };
}

function boundGroup(
  position: Float64Array,
  triangle: Int32Array,
  order: Int32Array,
  first: number,
  end: number,
  box: Float64Array,
  at: number,
): void {
  for (let axis = 0; axis < 3; axis++) {
    let least = Number.POSITIVE_INFINITY;
    let most = Number.NEGATIVE_INFINITY;
    for (let i = first; i < end; i++) {
      const t = 3 * order[i]!;
      for (let k = 0; k < 3; k++) {
        const value = position[3 * triangle[t + k]! + axis]!;
        if (value < least) least = value;
        if (value > most) most = value;
      }
    }
    box[at + axis] = least;
    box[at + 3 + axis] = most;
  }
}

function longestAxis(centre: Float64Array, order: Int32Array, first: number, end: number): number {
  let axis = 0;
  let longest = -1;
  for (let candidate = 0; candidate < 3; candidate++) {
    let least = Number.POSITIVE_INFINITY;
    let most = Number.NEGATIVE_INFINITY;
    for (let i = first; i < end; i++) {
      const value = centre[3 * order[i]! + candidate]!;
      if (value < least) least = value;
      if (value > most) most = value;
    }
    if (most - least > longest) {
      longest = most - least;
      axis = candidate;
    }
  }
  return axis;
}

/** Hoare's selection: afterwards no centre before `middle` is greater, none after it is less. */
function selectMedian(
  centre: Float64Array,
  axis: number,
  order: Int32Array,
  first: number,
  last: number,
  middle: number,
): void {
  let lo = first;
  let hi = last;
  while (lo < hi) {
    const pivot = centre[3 * order[(lo + hi) >> 1]! + axis]!;
    let i = lo;
    let j = hi;
    while (i <= j) {
      while (centre[3 * order[i]! + axis]! < pivot) i++;
      while (centre[3 * order[j]! + axis]! > pivot) j--;
      if (i > j) break;
      const kept = order[i]!;
      order[i] = order[j]!;
      order[j] = kept;
      i++;
      j--;
    }
    if (middle <= j) hi = j;
    else if (middle >= i) lo = i;
    else return;
  }
}
