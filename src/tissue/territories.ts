import { InvariantError } from '../core/errors.ts';
import { halfDiagonal } from './region.ts';
import type { Tissue } from './tissue.ts';

/*
 * Lab notes. Boxes are halved along their longest edge, each with the list of points that may be nearest somewhere in it;
 * a box with one such point, wholly in the tissue and of one demand, is given to it whole, so work goes to the faces
 * between territories only. A point is struck from a box's list by the plane half-way to the point nearest to the box's
 * centre: exact for that pair, and it leaves far shorter lists than comparing distances to the ball round the box.
 * 14 µs a terminal in a box or an ellipsoid at 10⁵ and 18 at 10⁶ (processor time on a busy machine); the same as a recursive
 * function, halved down to single samples: 20 and 16.
 * A lattice over the whole box was not tried: where demand is a thousandfold in a small part, it either misses the
 * territories there or has a thousand times too many points elsewhere.
 */

/** Samples a territory is worth at least, on average, and all territories together. */
const EACH = 64;
const ALL = 1 << 20;

/** Steps of the places of samples within their boxes: powers of 1/g with g⁴ = g + 1, from memory (R sequence, Roberts 2018). */
const STEPS = [0.8191725133961645, 0.6710436067037893, 0.5497004779019703] as const;

/** Order in which the halves of a box are put on the stack. */
const SIDES = [1, -1] as const;
/** Most boxes that wait at any time: one a halving, of which three make an eighth. */
const DEEPEST = 256;

function fraction(x: number): number {
  return x - Math.floor(x);
}

/** No territory counts for less than this share of the mean: a terminal carries some flow. */
export const LEAST_TERRITORY = 1 / 64;

/**
 * The demand each of some points serves: the integral of demand over the tissue that is nearer to it than to the others
 * (straight distance, through gaps of the tissue too).
 *
 * A box is halved until the demand in it is at most an eighth of what a point has on average, and at most 2^−17 of the
 * whole; each of its eighths then counts as one place in it does, from a sequence that spreads evenly. A territory is never less than `LEAST_TERRITORY` of the mean.
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
  if (n === 0) return territory;
  const quota = perfusion.whole / Math.max(EACH * n, ALL);
  const bounds = Float64Array.of(1, 1);
  let samples = 0;
  // Lists of candidates, one after another: a box's stands above its parent's.
  let list = new Int32Array(4 * n + 64);
  for (let i = 0; i < n; i++) list[i] = i;
  // Boxes to be looked at: centre, half edges and the demand that the whole box is known to have, or NaN; then the range of
  // its parent's list, and 1 where it is known to lie in the tissue.
  const box = new Float64Array(7 * DEEPEST);
  const range = new Int32Array(3 * DEEPEST);
  let top = 0;
  const push = (x: number, y: number, z: number, hx: number, hy: number, hz: number, even: number) => {
    if (top === DEEPEST) throw new InvariantError(`measureTerritories: boxes more than ${DEEPEST} deep`);
    const at = 7 * top;
    box[at] = x;
    box[at + 1] = y;
    box[at + 2] = z;
    box[at + 3] = hx;
    box[at + 4] = hy;
    box[at + 5] = hz;
    box[at + 6] = even;
    return 3 * top++;
  };
  const half = (k: 0 | 1 | 2) => 0.5 * (tissue.max[k] - tissue.min[k]);
  const centre = (k: 0 | 1 | 2) => tissue.min[k] + half(k);
  range[push(centre(0), centre(1), centre(2), half(0), half(1), half(2), perfusion.uniform ? 1 : Number.NaN) + 1] = n;

  while (top > 0) {
    top--;
    const x = box[7 * top]!;
    const y = box[7 * top + 1]!;
    const z = box[7 * top + 2]!;
    const hx = box[7 * top + 3]!;
    const hy = box[7 * top + 4]!;
    const hz = box[7 * top + 5]!;
    let even = box[7 * top + 6]!;
    const from = range[3 * top]!;
    const to = range[3 * top + 1]!;
    let inside = range[3 * top + 2]!;
    let most = even;
    if (inside === 0 || Number.isNaN(even)) {
      const reach = halfDiagonal(2 * hx, 2 * hy, 2 * hz) * (1 + 1e-9);
      if (inside === 0) {
        const depth = tissue.depth(x, y, z);
        if (depth < -reach) continue;
        inside = depth > reach ? 1 : 0;
      }
      if (Number.isNaN(even)) {
        perfusion.within(x, y, z, reach, bounds);
        most = bounds[1]!;
        if (most === 0) continue;
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
    if (end - first === 1 && inside === 1 && !Number.isNaN(even)) {
      territory[nearest]! += even * volume;
      continue;
    }
    if (most * volume <= 8 * quota) {
      for (let c = 0; c < 8; c++) {
        samples++;
        const sx = x + hx * ((c & 1 ? 0 : -1) + fraction(samples * STEPS[0]));
        const sy = y + hy * ((c & 2 ? 0 : -1) + fraction(samples * STEPS[1]));
        const sz = z + hz * ((c & 4 ? 0 : -1) + fraction(samples * STEPS[2]));
        if (inside === 0 && !tissue.deeperThan(sx, sy, sz, 0)) continue;
        let best = Number.POSITIVE_INFINITY;
        for (let k = first; k < end; k++) {
          const at = 3 * list[k]!;
          const dx = points[at]! - sx;
          const dy = points[at + 1]! - sy;
          const dz = points[at + 2]! - sz;
          const square = dx * dx + dy * dy + dz * dz;
          if (square < best) {
            best = square;
            nearest = list[k]!;
          }
        }
        territory[nearest]! += (Number.isNaN(even) ? perfusion.at(sx, sy, sz) : even) * 0.125 * volume;
      }
      continue;
    }
    const cut = hx >= hy && hx >= hz ? 0 : hy >= hz ? 1 : 2;
    const qx = cut === 0 ? 0.5 * hx : hx;
    const qy = cut === 1 ? 0.5 * hy : hy;
    const qz = cut === 2 ? 0.5 * hz : hz;
    // The lower half is looked at first. Lists of either are written above this one.
    for (const side of SIDES) {
      const at = push(x + side * (hx - qx), y + side * (hy - qy), z + side * (hz - qz), qx, qy, qz, even);
      range[at] = first;
      range[at + 1] = end;
      range[at + 2] = inside;
    }
  }
  const floor = (LEAST_TERRITORY * perfusion.whole) / n;
  for (let i = 0; i < n; i++) if (!(territory[i]! >= floor)) territory[i] = floor;
  return territory;
}
