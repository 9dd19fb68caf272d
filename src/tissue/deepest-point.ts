import { halfDiagonal } from './region.ts';
import type { Tissue } from './tissue.ts';

/** A point about as deep as any, and how deep any point can be. */
export interface DeepestPoint {
  readonly x: number;
  readonly y: number;
  readonly z: number;
  /** m; depth at the point; ≤ 0 where no point inside was found. */
  readonly depth: number;
  /** m; no point of the tissue is deeper. */
  readonly bound: number;
}

/** Gap between `depth` and `bound`, as a share of `depth`, at which the search ends. */
const CLOSE = 0.01;
const MOST_DEPTHS = 60_000;

/**
 * Looks for the deepest point by halving boxes, those that may hold the deepest first.
 *
 * @returns a point; `depth` ≥ 0.99 `bound`, or what 60,000 depths could settle (flat ridges, very thin walls)
 * Source:  branch and bound on the Lipschitz bound, level by level; common practice, no source.
 */
export function deepestPoint(tissue: Tissue): DeepestPoint {
  let ex = tissue.max[0] - tissue.min[0];
  let ey = tissue.max[1] - tissue.min[1];
  let ez = tissue.max[2] - tissue.min[2];
  let boxes = [tissue.min[0] + 0.5 * ex, tissue.min[1] + 0.5 * ey, tissue.min[2] + 0.5 * ez];
  let best = { x: boxes[0]!, y: boxes[1]!, z: boxes[2]!, depth: tissue.depth(boxes[0]!, boxes[1]!, boxes[2]!) };
  let bounds = [best.depth + halfDiagonal(ex, ey, ez)];
  let spent = 1;
  for (;;) {
    const top = bounds.reduce((a, b) => Math.max(a, b), best.depth);
    if (top - best.depth <= CLOSE * best.depth || spent >= MOST_DEPTHS)
      return { ...best, bound: Math.max(top, best.depth * (1 + CLOSE)) };
    // Cut the longest edge (and any nearly as long) of all boxes that may still hold a deeper point.
    const longest = Math.max(ex, ey, ez);
    const [cutX, cutY, cutZ] = [ex > 0.75 * longest, ey > 0.75 * longest, ez > 0.75 * longest];
    if (cutX) ex /= 2;
    if (cutY) ey /= 2;
    if (cutZ) ez /= 2;
    const reach = halfDiagonal(ex, ey, ez);
    const centres: number[] = [];
    const depths: number[] = [];
    for (let b = 0; b < bounds.length; b++) {
      if (bounds[b]! <= best.depth * (1 + CLOSE)) continue;
      for (let corner = 0; corner < 8; corner++) {
        if ((!cutX && corner & 1) || (!cutY && corner & 2) || (!cutZ && corner & 4)) continue;
        const x = boxes[3 * b]! + (cutX ? (corner & 1 ? 0.5 : -0.5) * ex : 0);
        const y = boxes[3 * b + 1]! + (cutY ? (corner & 2 ? 0.5 : -0.5) * ey : 0);
        const z = boxes[3 * b + 2]! + (cutZ ? (corner & 4 ? 0.5 : -0.5) * ez : 0);
        const d = tissue.depth(x, y, z);
        spent++;
        centres.push(x, y, z);
        depths.push(d);
        if (d > best.depth) best = { x, y, z, depth: d };
      }
    }
    boxes = [];
    bounds = [];
    // Boxes let go can hold nothing deeper than this.
    const dropped = Math.max(best.depth, best.depth * (1 + CLOSE));
    for (let i = 0; i < depths.length; i++) {
      const bound = depths[i]! + reach;
      if (bound <= dropped || bound <= 0) continue;
      boxes.push(centres[3 * i]!, centres[3 * i + 1]!, centres[3 * i + 2]!);
      bounds.push(bound);
    }
    if (bounds.length === 0) return { ...best, bound: Math.max(dropped, 0) };
  }
}
