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
  const firstChild = new Int32Array(n).fill(-1);
  const nextSibling = new Int32Array(n).fill(-1);
  for (let i = n - 1; i >= 0; i--) {
    const parent = loose.parent[i]!;
    if (parent < 0) continue;
    nextSibling[i] = firstChild[parent]!;
    firstChild[parent] = i;
  }
  const source = new Int32Array(n);
  const tree = new Int32Array(n);
  const treeStart = new Int32Array(trees + 1);
  const stack = new Int32Array(n + 1);
  let at = 0;
  for (let t = 0; t < trees; t++) {
    treeStart[t] = at;
    const root = loose.roots[t]!;
    const child = firstChild[root]!;
    if (child < 0 || nextSibling[child]! >= 0) {
      throw new InvariantError(
        `freezeForest: root of tree ${t} has ${child < 0 ? 'no child' : 'two children'}, expected one`,
      );
    }
    let top = 0;
    stack[top++] = root;
    while (top > 0) {
      const i = stack[--top]!;
      tree[at] = t;
      source[at++] = i;
      // A child goes on top of its sibling so that the lower loose row comes first.
      const mark = top;
      for (let c = firstChild[i]!; c >= 0; c = nextSibling[c]!) stack[top++] = c;
      for (let a = mark, b = top - 1; a < b; a++, b--) {
        const swap = stack[a]!;
        stack[a] = stack[b]!;
        stack[b] = swap;
      }
    }
  }
  treeStart[trees] = at;
  const rowOf = new Int32Array(n).fill(-1);
  for (let i = 0; i < at; i++) rowOf[source[i]!] = i;
  const parent = new Int32Array(at);
  const position = new Float64Array(3 * at);
  const radius = new Float64Array(at);
  const flow = new Float64Array(at);
  for (let i = 0; i < at; i++) {
    const s = source[i]!;
    const p = loose.parent[s]!;
    parent[i] = p < 0 ? -1 : rowOf[p]!;
    for (let k = 0; k < 3; k++) {
      const x = loose.position[3 * s + k]!;
      if (!Number.isFinite(x)) throw new InvariantError(`freezeForest: position of row ${s} is ${x}`);
      position[3 * i + k] = x;
    }
    const own = p < 0 ? firstChild[s]! : s;
    radius[i] = loose.radius[own]!;
    flow[i] = loose.flow[own]!;
    if (!(radius[i]! > 0 && radius[i]! < Infinity))
      throw new InvariantError(`freezeForest: radius of row ${s} is ${radius[i]} m`);
    if (!(flow[i]! > 0 && flow[i]! < Infinity))
      throw new InvariantError(`freezeForest: flow of row ${s} is ${flow[i]} m³/s`);
  }
  return {
    forest: { count: at, treeStart, tree: tree.slice(0, at), parent, position, radius, flow },
    source: source.slice(0, at),
  };
}
