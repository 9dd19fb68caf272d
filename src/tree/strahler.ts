import type { Forest } from './forest.ts';

/**
 * Strahler order of every row: terminals 1; where the two highest children tie at k the parent has k + 1, else the
 * higher child's order. A bend carries its child's order on; a root repeats its child's.
 *
 * Source: Strahler A N (1952), Bull Geol Soc Am 63:1117; from memory.
 * Cost:   O(n), one sweep towards the roots.
 */
export function strahlerOrders(forest: Forest): Int32Array {
  const n = forest.count;
  const order = new Int32Array(n);
  const highest = new Int32Array(n);
  const tied = new Uint8Array(n);
  for (let i = n - 1; i >= 0; i--) {
    const own = highest[i] === 0 ? 1 : highest[i]! + tied[i]!;
    order[i] = own;
    const parent = forest.parent[i]!;
    if (parent < 0) continue;
    if (own > highest[parent]!) {
      highest[parent] = own;
      tied[parent] = 0;
    } else if (own === highest[parent]!) tied[parent] = 1;
  }
  return order;
}
