import type { Forest, TreeRecord } from '../tree/forest.ts';

/** Children of every row, told apart by their row order. */
export interface ChildLists {
  /** (n) first child, or −1. */
  readonly first: Int32Array;
  /** (n) next child of the same parent, or −1. */
  readonly next: Int32Array;
  /** (n) number of children. */
  readonly count: Int32Array;
}

/** Links every row to its children. Parents must be in range. */
export function linkChildren(forest: Forest): ChildLists {
  const n = forest.count;
  const first = new Int32Array(n).fill(-1);
  const next = new Int32Array(n).fill(-1);
  const count = new Int32Array(n);
  for (let i = n - 1; i >= 0; i--) {
    const parent = forest.parent[i]!;
    if (parent < 0) continue;
    next[i] = first[parent]!;
    first[parent] = i;
    count[parent]!++;
  }
  return { first, next, count };
}

/** Namer of rows: `<tree>:<vessel number>`, where vessels are the rows that are not roots, counted through the forest. */
export function vesselNamer(record: TreeRecord): (row: number) => string {
  const { forest, names } = record;
  return (row) => {
    if (row < 0 || row >= forest.count) return `row ${row}`;
    const tree = forest.tree[row]!;
    const name = names[tree] ?? String(tree);
    if (forest.parent[row]! < 0) return `${name}:root`;
    let roots = 0;
    for (let t = 0; t + 1 < forest.treeStart.length && forest.treeStart[t]! <= row; t++) roots++;
    return `${name}:${row - roots}`;
  };
}

/** (n) m; length of the tube that ends at each row, 0 at roots. */
export function measureLengths(forest: Forest): Float64Array {
  const { count, parent, position } = forest;
  const length = new Float64Array(count);
  for (let i = 0; i < count; i++) {
    const p = parent[i]!;
    if (p < 0) continue;
    const dx = position[3 * i]! - position[3 * p]!;
    const dy = position[3 * i + 1]! - position[3 * p + 1]!;
    const dz = position[3 * i + 2]! - position[3 * p + 2]!;
    // Math.hypot costs five times as much, for sizes that no tissue has.
    length[i] = Math.sqrt(dx * dx + dy * dy + dz * dz);
  }
  return length;
}

/** m; diagonal of the box round all nodes. */
export function measureExtent(forest: Forest): number {
  let squares = 0;
  for (let k = 0; k < 3; k++) {
    let low = Infinity;
    let high = -Infinity;
    for (let i = k; i < 3 * forest.count; i += 3) {
      const x = forest.position[i]!;
      if (x < low) low = x;
      if (x > high) high = x;
    }
    if (high > low) squares += (high - low) * (high - low);
  }
  return Math.sqrt(squares);
}
