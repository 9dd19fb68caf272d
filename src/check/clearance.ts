import type { Forest } from '../tree/forest.ts';
import { segmentToSegment } from './axis-distance.ts';
import { buildBoxTree, traversalStack, visitOverlaps } from './box-tree.ts';
import type { Tally } from './result.ts';

/**
 * Measures the wall-to-wall distance of vessels that share no node.
 *
 * Every pair that could be closer than `gap` is measured; beyond that the search looks only for the closest pair, so its
 * reach shrinks as close pairs are met.
 *
 * @param gap   m, what is asked between walls
 * @param reach m, how far to look for the closest pair at first
 * @param tally sees one value a pair measured: axis distance − r₁ − r₂ in m
 * Cost: O(n log n) for trees whose vessels fill their boxes as trees do; 2·10⁶ vessels take about 10 s.
 */
export function measureClearance(forest: Forest, gap: number, reach: number, tally: Tally): void {
  const { count, parent, position, radius } = forest;
  const tubes = new Int32Array(count);
  let tubeCount = 0;
  for (let i = 0; i < count; i++) if (parent[i]! >= 0) tubes[tubeCount++] = i;
  const fill = (row: number, margin: number, out: Float64Array) => {
    const a = 3 * row;
    const b = 3 * parent[row]!;
    for (let k = 0; k < 3; k++) {
      const p = position[a + k]!;
      const q = position[b + k]!;
      out[k] = Math.min(p, q) - margin;
      out[k + 3] = Math.max(p, q) + margin;
    }
  };
  const tree = buildBoxTree(tubeCount, (item, out) => fill(tubes[item]!, radius[tubes[item]!]!, out));
  const stack = traversalStack();
  const query = new Float64Array(6);
  let margin = Math.max(gap, reach);
  let i = 0;
  let iParent = 0;
  let ri = 0;
  const meet = (slot: number) => {
    const j = tubes[tree.item[slot]!]!;
    const jParent = parent[j]!;
    if (iParent === jParent || i === jParent || iParent === j) return;
    const rj = radius[j]!;
    for (let k = 0; k < 3; k++) {
      const p = position[3 * j + k]!;
      const q = position[3 * jParent + k]!;
      if (Math.min(p, q) - rj > query[k + 3]! || Math.max(p, q) + rj < query[k]!) return;
    }
    const distance = segmentToSegment(position, iParent, i, jParent, j) - ri - rj;
    if (distance > margin) return;
    if (i < j) tally.see(distance, i, j);
    else tally.see(distance, j, i);
    if (distance < margin) {
      const next = Math.max(gap, distance);
      if (next < margin) {
        margin = next;
        fill(i, ri + margin, query);
      }
    }
  };
  for (let slot = 0; slot < tubeCount; slot++) {
    i = tubes[tree.item[slot]!]!;
    iParent = parent[i]!;
    ri = radius[i]!;
    fill(i, ri + margin, query);
    visitOverlaps(tree, query, slot + 1, stack, meet);
  }
}
