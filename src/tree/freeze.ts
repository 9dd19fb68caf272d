import { InvariantError } from '../core/errors.ts';
import type { Forest } from './forest.ts';

/** Rows in any order, as a builder keeps them. */
export interface LooseRows {
  readonly count: number;
  /** (n) parent row, −1 for a root. */
  readonly parent: ArrayLike<number>;
  /** (3n) m */
  readonly position: ArrayLike<number>;
  /** (n) m */
  readonly radius: ArrayLike<number>;
  /** (n) m³/s */
  readonly flow: ArrayLike<number>;
  /** Root rows, in the order of their trees. */
  readonly roots: ArrayLike<number>;
}

export interface Frozen {
  readonly forest: Forest;
  /** (n of the forest) row in the loose columns that each frozen row came from. */
  readonly source: Int32Array;
}

/**
 * Renumbers loose rows into preorder, children of a node in the order of their loose rows. Rows that no root reaches
 * are left out.
 *
 * @throws InvariantError where a root has not exactly one child, or a value is not finite or not positive
 * Cost: O(n)
 */
export function freezeForest(loose: LooseRows): Frozen {
  const n = loose.count;
  const trees = loose.roots.length;
  // Last child of row i at 2i, the sibling before row i at 2i + 1: neighbours, because they are asked for together.
  const link = new Int32Array(2 * n).fill(-1);
  for (let i = 0; i < n; i++) {
    const above = loose.parent[i]!;
    if (above < 0) continue;
    link[2 * i + 1] = link[2 * above]!;
    link[2 * above] = i;
  }
  const source = new Int32Array(n);
  const parent = new Int32Array(n);
  const tree = new Int32Array(n);
  const treeStart = new Int32Array(trees + 1);
  // Loose row and its parent's frozen row.
  let stack = new Int32Array(1024);
  let at = 0;
  for (let t = 0; t < trees; t++) {
    treeStart[t] = at;
    const root = loose.roots[t]!;
    const child = link[2 * root]!;
    if (child < 0 || link[2 * child + 1]! >= 0) {
      throw new InvariantError(
        `freezeForest: root of tree ${t} has ${child < 0 ? 'no child' : 'two children'}, expected one`,
      );
    }
    let top = 0;
    stack[top++] = root;
    stack[top++] = -1;
    while (top > 0) {
      parent[at] = stack[--top]!;
      const i = stack[--top]!;
      source[at] = i;
      tree[at] = t;
      // The first child comes to lie on top.
      for (let c = link[2 * i]!; c >= 0; c = link[2 * c + 1]!) {
        if (top === stack.length) {
          const wider = new Int32Array(2 * top);
          wider.set(stack);
          stack = wider;
        }
        stack[top++] = c;
        stack[top++] = at;
      }
      at++;
    }
  }
  treeStart[trees] = at;
  const position = new Float64Array(3 * at);
  const radius = new Float64Array(at);
  const flow = new Float64Array(at);
  for (let i = 0; i < at; i++) {
    const s = source[i]!;
    const x = loose.position[3 * s]!;
    const y = loose.position[3 * s + 1]!;
    const z = loose.position[3 * s + 2]!;
    // A product with 0 is 0 for numbers that are finite, else NaN.
    if (!(x * 0 + y * 0 + z * 0 === 0)) {
      throw new InvariantError(`freezeForest: position of row ${s} is (${x}, ${y}, ${z})`);
    }
    position[3 * i] = x;
    position[3 * i + 1] = y;
    position[3 * i + 2] = z;
    // A root's only child is the row after it.
    const own = parent[i]! < 0 ? source[i + 1]! : s;
    const r = loose.radius[own]!;
    const q = loose.flow[own]!;
    if (!(r > 0 && r < Infinity)) throw new InvariantError(`freezeForest: radius of row ${s} is ${r} m`);
    if (!(q > 0 && q < Infinity)) throw new InvariantError(`freezeForest: flow of row ${s} is ${q} m³/s`);
    radius[i] = r;
    flow[i] = q;
  }
  const trimmed = (column: Int32Array) => (at === n ? column : column.slice(0, at));
  return {
    forest: { count: at, treeStart, tree: trimmed(tree), parent: trimmed(parent), position, radius, flow },
    source: trimmed(source),
  };
}
