import type { Forest } from '../tree/forest.ts';
import type { LooseTree } from './assemble.ts';

/** A forest of loose nodes and vessels, and how their columns become columns of its rows. */
export interface Placed {
  readonly forest: Forest;
  /** Fills `out` (n); a root is given its vessel's value. */
  ofVessels<Column extends Float64Array | Int32Array>(values: Column, out: Column): Column;
  /** (n) A new column, or the one given. */
  ofNodes(values: Float64Array): Float64Array;
}

/**
 * The forest of nodes that stand in the order of its rows, and of vessels in the order of their far ends, as our own files
 * have them: nothing is searched or moved.
 *
 * @param loose indices in range, values checked; its positions become the forest's
 * @returns null where they stand otherwise
 * Cost: O(nodes), at one third of the memory and of the time of any order
 */
export function keepRows(loose: LooseTree): Placed | null {
  const { nodes: n, from, flow } = loose;
  const treeStart = startsInOrder(loose);
  if (treeStart === null || flow === null) return null;
  const trees = treeStart.length - 1;
  const ofVessels: Placed['ofVessels'] = (values, out) => {
    for (let t = 0; t < trees; t++) {
      const root = treeStart[t]!;
      out.set(values.subarray(root - t, treeStart[t + 1]! - t - 1), root + 1);
      out[root] = out[root + 1]!;
    }
    return out;
  };
  const parent = ofVessels(from, new Int32Array(n));
  const tree = new Int32Array(n);
  for (let t = 0; t < trees; t++) {
    parent[treeStart[t]!] = -1;
    tree.fill(t, treeStart[t]!, treeStart[t + 1]!);
  }
  const forest: Forest = {
    count: n,
    treeStart,
    tree,
    parent,
    position: loose.position,
    radius: ofVessels(loose.radius, new Float64Array(n)),
    flow: ofVessels(flow, new Float64Array(n)),
  };
  return { forest, ofVessels, ofNodes: (values) => values };
}

/**
 * First row of each tree, then the number of rows, where nodes and vessels stand in order; else null.
 *
 * In preorder a parent is the row before or one of that row's ancestors. The walk up from the row before leaves each row
 * once, so all walks together take no more steps than there are rows.
 */
function startsInOrder({ nodes, vessels, from, to, tree }: LooseTree): Int32Array | null {
  const starts: number[] = [];
  const parent = new Int32Array(nodes);
  let next = 0;
  for (let v = 0; v < vessels; v++) {
    const above = from[v]!;
    if (above === next) {
      starts.push(next);
      parent[next++] = -1;
    } else {
      let ancestor = next - 1;
      while (ancestor > above) ancestor = parent[ancestor]!;
      // A root has one vessel: a second one would start a tree of its own.
      if (ancestor !== above || starts.length === 0 || above === starts[starts.length - 1]) return null;
    }
    if (to[v] !== next || (tree !== null && tree[v] !== starts.length - 1)) return null;
    parent[next++] = above;
  }
  return next === nodes ? Int32Array.from([...starts, nodes]) : null;
}
