import type { Reals } from '../core/reals.ts';
import type { Forest } from '../tree/forest.ts';

/**
 * Largest relative imbalance of a node that is no end.
 *
 * @param flow (n) m³/s, any sign; the forest's own where left out
 * @returns    |in − out| over the largest flow of its tree; 0 for a
 *             tree without nodes between its ends
 * Cost: O(n)
 */
export function measureImbalance(forest: Forest, flow: Reals = forest.flow): number {
  const n = forest.count;
  const out = new Float64Array(n);
  const ends = new Uint8Array(n).fill(1);
  for (let i = n - 1; i >= 0; i--) {
    const parent = forest.parent[i]!;
    if (parent < 0) continue;
    out[parent]! += flow[i]!;
    ends[parent] = 0;
  }
  let worst = 0;
  for (let t = 0; t + 1 < forest.treeStart.length; t++) {
    const root = forest.treeStart[t]!;
    let scale = Math.abs(flow[root]!);
    let most = 0;
    for (let i = root + 1; i < forest.treeStart[t + 1]!; i++) {
      if (Math.abs(flow[i]!) > scale) scale = Math.abs(flow[i]!);
      if (ends[i] === 0) most = Math.max(most, Math.abs(flow[i]! - out[i]!));
    }
    if (most > 0) worst = Math.max(worst, most / scale);
  }
  return worst;
}
