import { createPointGrid, type PointGrid } from './point-grid.ts';

/**
 * Sites that keep distances of their own, in proportion to one common reach: a site's *factor* times the reach.
 *
 * Two sites conflict where they are nearer than the lesser of their own distances, so that sparse and dense parts do not
 * thin each other out at their border. Sites are kept in levels, each with factors up to twice those of the one before, and
 * a level in a grid of its own: whatever the span of factors, a question looks into few cells of few points. Against a
 * site of another level the distance asked is that of its level, at most twice its own.
 */
export interface SiteGrid {
  readonly count: number;
  /** (3·count) m; in the order of adding; a copy. */
  positions(): Float64Array;
  add(x: number, y: number, z: number, factor: number): void;
  /** True where a site of this factor, up to `slack` (m) away from the place, would conflict wherever it is. */
  crowded(x: number, y: number, z: number, factor: number, slack: number): boolean;
  /** Lessens the reach (m). O(1) a site over any sequence of falling reaches. */
  shrink(reach: number): void;
}

/**
 * @param reach m, > 0
 * @param least factor that any site may have, > 0
 * @param most  greatest such factor
 */
export function createSiteGrid(reach: number, least: number, most: number): SiteGrid {
  const tops = [least];
  while (tops[tops.length - 1]! < most) tops.push(2 * tops[tops.length - 1]!);
  const grids: PointGrid[] = tops.map((top) => createPointGrid(reach * top));
  let level = new Uint8Array(tops.length === 1 ? 0 : 1024);
  let count = 0;

  function levelOf(factor: number): number {
    let l = 0;
    while (l < tops.length - 1 && factor > tops[l]!) l++;
    return l;
  }

  return {
    get count() {
      return count;
    },
    positions() {
      if (grids.length === 1) return grids[0]!.positions();
      const all = grids.map((grid) => grid.positions());
      const next = new Int32Array(grids.length);
      const out = new Float64Array(3 * count);
      for (let row = 0; row < count; row++) {
        const l = level[row]!;
        const from = 3 * next[l]!++;
        for (let k = 0; k < 3; k++) out[3 * row + k] = all[l]![from + k]!;
      }
      return out;
    },
    add(x, y, z, factor) {
      const l = levelOf(factor);
      if (grids.length > 1) {
        if (count === level.length) {
          const longer = new Uint8Array(2 * count);
          longer.set(level);
          level = longer;
        }
        level[count] = l;
      }
      grids[l]!.add(x, y, z);
      count++;
    },
    crowded(x, y, z, factor, slack) {
      for (let l = 0; l < grids.length; l++) {
        if (grids[l]!.count === 0) continue;
        const distance = reach * Math.min(factor, tops[l]!) - slack;
        if (distance > 0 && grids[l]!.crowded(x, y, z, distance)) return true;
      }
      return false;
    },
    shrink(smaller) {
      reach = smaller;
      // Cells three quarters empty of use: sort anew. The count has then more than doubled, so this is O(1) a site.
      for (let l = 0; l < grids.length; l++) {
        if (reach * tops[l]! < 0.7 * grids[l]!.edge) grids[l]!.refine(reach * tops[l]!);
      }
    },
  };
}
