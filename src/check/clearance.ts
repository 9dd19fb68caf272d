import type { Forest } from '../tree/forest.ts';
import { segmentToSegment } from './axis-distance.ts';
import { buildBoxTree, FAN, visitNearLeaves } from './box-tree.ts';
import type { Tally } from './result.ts';

/**
 * Measures the wall-to-wall distance of vessels that share no node.
 *
 * Every pair that could be closer than `gap` is measured; beyond that the search looks only for the closest pair, so its
 * reach shrinks as close pairs are met.
 *
 * Where radii are far too large, as in a file in the wrong unit, all vessels lie in one another and there is no end of pairs:
 * past a million and twenty a vessel that break the promise, the rest is not looked at.
 *
 * @param gap   m, what is asked between walls
 * @param reach m, how far to look for the closest pair at first
 * @param tally sees one value a pair measured: axis distance − r₁ − r₂ in m
 * @returns     false where it was broken off
 * Cost: O(n log n) for trees whose vessels fill their boxes as trees do; 2·10⁶ vessels take about 2 s.
 */
export function measureClearance(forest: Forest, gap: number, reach: number, tally: Tally): boolean {
  const { count, parent, position, radius } = forest;
  const tubes = new Int32Array(count);
  let tubeCount = 0;
  for (let i = 0; i < count; i++) if (parent[i]! >= 0) tubes[tubeCount++] = i;
  const fill = (item: number, out: Float64Array) => {
    const row = tubes[item]!;
    const a = 3 * row;
    const b = 3 * parent[row]!;
    const r = radius[row]!;
    for (let k = 0; k < 3; k++) {
      const p = position[a + k]!;
      const q = position[b + k]!;
      out[k] = Math.min(p, q) - r;
      out[k + 3] = Math.max(p, q) + r;
    }
  };
  const box = new Float32Array(6 * tubeCount);
  const tree = buildBoxTree(tubeCount, fill, box);
  const row = new Int32Array(tubeCount);
  for (let slot = 0; slot < tubeCount; slot++) row[slot] = tubes[tree.item[slot]!]!;
  const near = { margin: Math.max(gap, reach) };
  const enough = 1e6 + 20 * tubeCount;
  let whole = true;

  const meet = (i: number, j: number): void => {
    const iParent = parent[i]!;
    const jParent = parent[j]!;
    if (iParent === jParent || i === jParent || iParent === j) return;
    const distance = segmentToSegment(position, iParent, i, jParent, j) - radius[i]! - radius[j]!;
    if (distance > near.margin) return;
    if (i < j) tally.see(distance, i, j);
    else tally.see(distance, j, i);
    if (tally.failures > enough) {
      near.margin = -Infinity;
      whole = false;
    } else if (distance < near.margin) near.margin = Math.max(gap, distance);
  };
  visitNearLeaves(tree, near, (one, other) => {
    const endA = Math.min(FAN * one + FAN, tubeCount);
    const endB = Math.min(FAN * other + FAN, tubeCount);
    for (let a = FAN * one; a < endA; a++) {
      const at = 6 * a;
      const { margin } = near;
      const x0 = box[at]! - margin;
      const y0 = box[at + 1]! - margin;
      const z0 = box[at + 2]! - margin;
      const x1 = box[at + 3]! + margin;
      const y1 = box[at + 4]! + margin;
      const z1 = box[at + 5]! + margin;
      for (let b = Math.max(FAN * other, a + 1); b < endB; b++) {
        const to = 6 * b;
        if (box[to]! > x1 || box[to + 3]! < x0 || box[to + 1]! > y1 || box[to + 4]! < y0) continue;
        if (box[to + 2]! > z1 || box[to + 5]! < z0) continue;
        meet(row[a]!, row[b]!);
      }
    }
  });
  return whole;
}
