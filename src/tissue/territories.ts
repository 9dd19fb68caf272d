import { halfDiagonal } from './region.ts';
import type { Tissue } from './tissue.ts';

/*
 * Lab notes. Boxes are halved along their longest edge, each with the list of points that may be nearest somewhere in it;
 * a box with one such point, wholly in the tissue and of one demand, is given to it whole, so work goes to the faces
 * between territories only. A point is struck from a box's list by the plane half-way to the point nearest to the box's
 * centre: exact for that pair, and it leaves far shorter lists than comparing distances to the ball round the box.
 * A lattice over the whole box was not tried: where demand is a thousandfold in a small part, it either misses the
 * territories there or has a thousand times too many points elsewhere.
 */

/** Samples a territory is worth at least, on average, and all territories together. */
const EACH = 64;
const ALL = 1 << 20;

/** No territory counts for less than this share of the mean: a terminal carries some flow. */
export const LEAST_TERRITORY = 1 / 64;

/**
 * The demand each of some points serves: the integral of demand over the tissue that is nearer to it than to the others
 * (straight distance, through gaps of the tissue too).
 *
 * A box is halved until the demand in it is at most a 64th of what a point has on average, and at most 2^−20 of the whole,
 * and then counts as its centre does. A territory is never less than `LEAST_TERRITORY` of the mean.
 *
 * @param points (3n) m, no two the same
 * @returns      (n) m³ at demand 1; their sum is the whole demand, within the error of so many samples
 * Source: recursive subdivision of Voronoi cells, common practice, no source.
 * Cost:   see `npm run bench tissue`.
 */
export function measureTerritories(tissue: Tissue, points: Float64Array): Float64Array {
  const n = points.length / 3;
  const { perfusion } = tissue;
  const territory = new Float64Array(n);
  const quota = perfusion.whole / Math.max(EACH * n, ALL);
  const bounds = Float64Array.of(1, 1);
  // Lists of candidates, one after another: a box's stands above its parent's.
  let list = new Int32Array(4 * n + 64);
  for (let i = 0; i < n; i++) list[i] = i;

  /** @param even NaN, or the demand that the whole box is known to have */
  function visit(
    x: number,
    y: number,
    z: number,
    hx: number,
    hy: number,
    hz: number,
    from: number,
    to: number,
    inside: boolean,
    even: number,
  ): void {
    let most = even;
    if (!inside || Number.isNaN(even)) {
      const reach = halfDiagonal(2 * hx, 2 * hy, 2 * hz) * (1 + 1e-9);
      if (!inside) {
        const depth = tissue.depth(x, y, z);
        if (depth < -reach) return;
        inside = depth > reach;
      }
      if (Number.isNaN(even)) {
        perfusion.within(x, y, z, reach, bounds);
        most = bounds[1]!;
        if (most === 0) return;
        if (bounds[0] === most) even = most;
      }
    }
    let nearest = list[from]!;
    let first = from;
    let end = to;
    if (to - from > 1) {
      let best = Number.POSITIVE_INFINITY;
      for (let k = from; k < to; k++) {
        const at = 3 * list[k]!;
        const dx = points[at]! - x;
        const dy = points[at + 1]! - y;
        const dz = points[at + 2]! - z;
        const square = dx * dx + dy * dy + dz * dz;
        if (square < best) {
          best = square;
          nearest = list[k]!;
        }
      }
      if (to + to - from > list.length) {
        const longer = new Int32Array(2 * (to + to - from));
        longer.set(list);
        list = longer;
      }
      const nx = points[3 * nearest]!;
      const ny = points[3 * nearest + 1]!;
      const nz = points[3 * nearest + 2]!;
      first = to;
      end = to;
      for (let k = from; k < to; k++) {
        const at = 3 * list[k]!;
        const px = points[at]!;
        const py = points[at + 1]!;
        const pz = points[at + 2]!;
        const dx = px - x;
        const dy = py - y;
        const dz = pz - z;
        const spare = 2 * (Math.abs(px - nx) * hx + Math.abs(py - ny) * hy + Math.abs(pz - nz) * hz);
        if (dx * dx + dy * dy + dz * dz - best <= spare * (1 + 1e-9)) list[end++] = list[k]!;
      }
    }
    const volume = 8 * hx * hy * hz;
    if (end - first === 1 && inside && !Number.isNaN(even)) {
      territory[nearest]! += even * volume;
      return;
    }
    if (most * volume <= quota) {
      if (inside || tissue.deeperThan(x, y, z, 0)) {
        territory[nearest]! += (Number.isNaN(even) ? perfusion.at(x, y, z) : even) * volume;
      }
      return;
    }
    if (hx >= hy && hx >= hz) {
      visit(x - 0.5 * hx, y, z, 0.5 * hx, hy, hz, first, end, inside, even);
      visit(x + 0.5 * hx, y, z, 0.5 * hx, hy, hz, first, end, inside, even);
    } else if (hy >= hz) {
      visit(x, y - 0.5 * hy, z, hx, 0.5 * hy, hz, first, end, inside, even);
      visit(x, y + 0.5 * hy, z, hx, 0.5 * hy, hz, first, end, inside, even);
    } else {
      visit(x, y, z - 0.5 * hz, hx, hy, 0.5 * hz, first, end, inside, even);
      visit(x, y, z + 0.5 * hz, hx, hy, 0.5 * hz, first, end, inside, even);
    }
  }

  const [min, max] = [tissue.min, tissue.max];
  const mid = (k: 0 | 1 | 2) => 0.5 * (min[k] + max[k]);
  const half = (k: 0 | 1 | 2) => 0.5 * (max[k] - min[k]);
  const even = perfusion.uniform ? 1 : Number.NaN;
  if (n > 0) visit(mid(0), mid(1), mid(2), half(0), half(1), half(2), 0, n, false, even);
  const floor = (LEAST_TERRITORY * perfusion.whole) / n;
  for (let i = 0; i < n; i++) if (!(territory[i]! >= floor)) territory[i] = floor;
  return territory;
}
