import type { Rows } from '../core/reals.ts';
import type { Forest } from './forest.ts';

/** Children of every row: those of row i are `list[start[i]] … list[start[i + 1] − 1]`, in row order. */
export interface Children {
  /** (n + 1) */
  readonly start: Rows;
  /** (n − trees) */
  readonly list: Rows;
}

/** Lists the children of every row. Cost: O(n), two passes. */
export function listChildren(forest: Forest): Children {
  const n = forest.count;
  const start = new Int32Array(n + 1);
  for (let i = 0; i < n; i++) {
    const parent = forest.parent[i]!;
    if (parent >= 0) start[parent + 1]!++;
  }
  for (let i = 0; i < n; i++) start[i + 1]! += start[i]!;
  const next = start.slice(0, n);
  const list = new Int32Array(start[n]!);
  for (let i = 0; i < n; i++) {
    const parent = forest.parent[i]!;
    if (parent >= 0) list[next[parent]!++] = i;
  }
  return { start, list };
}
