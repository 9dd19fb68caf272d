import type { Forest } from '../tree/forest.ts';
import type { Region } from './depth.ts';
import type { Tally } from './result.ts';

/** Points round a ring; the shallowest is then searched for between its neighbours. */
const AROUND = 16;
/** Golden-section steps of that search: the angle is then known to 4 mrad, the depth to 1e-5 radii. */
const NARROWINGS = 12;
/** Stations along a tube are at most this many radii apart. */
const SPACING = 0.5;

/**
 * Measures how deep the lumen surface of every tube lies in the tissue.
 *
 * A stretch of axis of half-length h round a point of depth d holds all its surface points within √(r² + h²) of that
 * point, so they lie at least d − √(r² + h²) deep. Stretches are halved until that bound shows them to be neither
 * outside nor the worst so far, or until they are half a radius long; then a ring of points is measured. Deep vessels
 * cost one look-up.
 *
 * @param exempt (n) 1 where a tube is not looked at
 * @param tally  sees one value a vessel: its shallowest surface point met, in m
 */
export function measureContainment(forest: Forest, region: Region, exempt: Uint8Array, tally: Tally): void {
  const { count, parent, position, radius } = forest;
  const { depth } = region;
  const low = new Float64Array(256);
  const high = new Float64Array(256);
  const ring = new Float64Array(9);
  for (let i = 0; i < count; i++) {
    const p = parent[i]!;
    if (p < 0 || exempt[i] === 1) continue;
    const r = radius[i]!;
    const ax = position[3 * p]!;
    const ay = position[3 * p + 1]!;
    const az = position[3 * p + 2]!;
    let ux = position[3 * i]! - ax;
    let uy = position[3 * i + 1]! - ay;
    let uz = position[3 * i + 2]! - az;
    const length = Math.hypot(ux, uy, uz);
    if (length > 0) {
      ux /= length;
      uy /= length;
      uz /= length;
    } else ux = 1;
    const enough = Math.max(0, Number.isNaN(tally.worst) ? Infinity : tally.worst);
    let shallowest = Infinity;
    let top = 0;
    low[0] = 0;
    high[top++] = length;
    let whole = true;
    while (top > 0) {
      top--;
      const from = low[top]!;
      const to = high[top]!;
      const half = 0.5 * (to - from);
      const s = from + half;
      const bound = depth(ax + s * ux, ay + s * uy, az + s * uz) - Math.sqrt(r * r + half * half);
      if (bound >= enough) continue;
      if (whole) {
        // The two rims; with them the ends of the tube are measured, not only bounded.
        frame(ring, ux, uy, uz, r);
        shallowest = Math.min(shallowest, measureRing(region, ring, ax, ay, az, r, enough));
        shallowest = Math.min(
          shallowest,
          measureRing(region, ring, ax + length * ux, ay + length * uy, az + length * uz, r, enough),
        );
        whole = false;
      }
      if (2 * half <= SPACING * r || top > 250) {
        shallowest = Math.min(shallowest, measureRing(region, ring, ax + s * ux, ay + s * uy, az + s * uz, r, enough));
        continue;
      }
      low[top] = from;
      high[top++] = s;
      low[top] = s;
      high[top++] = to;
    }
    if (shallowest < Infinity) tally.see(shallowest, i);
    else tally.checked++;
  }
}

/** Two vectors of length r square to a unit vector u and to each other, into ring[0…5]. */
function frame(ring: Float64Array, ux: number, uy: number, uz: number, r: number): void {
  // Square to u and to the coordinate axis least along u.
  const x = Math.abs(ux);
  const y = Math.abs(uy);
  const z = Math.abs(uz);
  let ex = 0;
  let ey = 0;
  let ez = 0;
  if (x <= y && x <= z) {
    ey = -uz;
    ez = uy;
  } else if (y <= z) {
    ex = uz;
    ez = -ux;
  } else {
    ex = -uy;
    ey = ux;
  }
  const scale = r / Math.hypot(ex, ey, ez);
  ex *= scale;
  ey *= scale;
  ez *= scale;
  ring[0] = ex;
  ring[1] = ey;
  ring[2] = ez;
  ring[3] = uy * ez - uz * ey;
  ring[4] = uz * ex - ux * ez;
  ring[5] = ux * ey - uy * ex;
}

/** Least depth met on the circle of a ring's vectors round a centre. */
function measureRing(
  region: Region,
  ring: Float64Array,
  x: number,
  y: number,
  z: number,
  r: number,
  enough: number,
): number {
  // No point of the circle is more than r shallower than its centre.
  const middle = region.depth(x, y, z) - r;
  if (middle >= enough) return middle;
  const at = (angle: number) => {
    const c = Math.cos(angle);
    const s = Math.sin(angle);
    return region.depth(
      x + c * ring[0]! + s * ring[3]!,
      y + c * ring[1]! + s * ring[4]!,
      z + c * ring[2]! + s * ring[5]!,
    );
  };
  const step = (2 * Math.PI) / AROUND;
  let best = Infinity;
  let angle = 0;
  for (let k = 0; k < AROUND; k++) {
    const d = at(k * step);
    if (d < best) {
      best = d;
      angle = k * step;
    }
  }
  // No point of the circle is farther than half a step from a ring point.
  if (best - 2 * r * Math.sin(0.25 * step) >= enough) return best;
  const golden = 0.6180339887498949;
  let a = angle - step;
  let b = angle + step;
  let c = b - golden * (b - a);
  let d = a + golden * (b - a);
  let atC = at(c);
  let atD = at(d);
  for (let k = 0; k < NARROWINGS; k++) {
    if (atC < atD) {
      b = d;
      d = c;
      atD = atC;
      c = b - golden * (b - a);
      atC = at(c);
    } else {
      a = c;
      c = d;
      atC = atD;
      d = a + golden * (b - a);
      atD = at(d);
    }
  }
  return Math.min(best, atC, atD);
}
