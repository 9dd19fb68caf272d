import type { Forest } from '../tree/forest.ts';
import type { Region } from './depth.ts';
import type { Tally } from './result.ts';

/** Points round a ring; the shallowest is then searched for between its neighbours. */
const AROUND = 16;
/** Stations along a tube are at most this many radii apart; the shallowest is then searched for between its neighbours. */
const SPACING = 0.5;
/** Golden-section steps of both searches: round the ring, the angle is then known to 4 mrad, the depth to 1e-5 radii. */
const NARROWINGS = 12;

/** The tube at hand, and two vectors square to it and as long as its radius. */
interface Tube {
  r: number;
  length: number;
  /** m */
  readonly from: Float64Array;
  /** Unit vector along the axis. */
  readonly along: Float64Array;
  readonly across: Float64Array;
  readonly aside: Float64Array;
}

/**
 * Measures how deep the lumen of every tube lies in the tissue: its surface, and its axis, so that a hole which lies
 * within the lumen is not missed either.
 *
 * A stretch of axis of half-length h round a point of depth d holds all its surface points within √(r² + h²) of that
 * point, so they lie at least d − √(r² + h²) deep. Stretches are halved until that bound shows them to be neither
 * outside nor the worst so far, or until they are half a radius long; then a ring of points is measured. Deep vessels
 * cost one look-up.
 *
 * @param skip  m by row: length of a tube's first stretch that is not looked at (inlet stubs)
 * @param tally  sees one value a vessel: its shallowest point met, in m
 */
export function measureContainment(
  forest: Forest,
  region: Region,
  skip: ReadonlyMap<number, number>,
  tally: Tally,
): void {
  const { count, parent } = forest;
  const { depthAtLeast } = region;
  const low = new Float64Array(256);
  const high = new Float64Array(256);
  const vector = () => new Float64Array(3);
  const tube: Tube = { r: 0, length: 0, from: vector(), along: vector(), across: vector(), aside: vector() };
  for (let i = 0; i < count; i++) {
    if (parent[i]! < 0) continue;
    layTube(tube, forest, i);
    const { r, length, from, along } = tube;
    const start = skip.get(i) ?? 0;
    const worst = Number.isNaN(tally.worst) ? Infinity : tally.worst;
    // Depths from here on need not be known: the vessel is no finding and not the worst. Once it is a finding that will
    // not be listed, only a new worst is of interest.
    let enough = Math.max(0, worst);
    let shallowest = Infinity;
    let place = 0;
    const look = (s: number) => {
      const depth = measureRing(region, tube, s, enough);
      if (depth >= shallowest) return;
      shallowest = depth;
      place = s;
      if (tally.failures >= tally.head.cap && tally.breaks(depth)) enough = Math.min(worst, depth);
    };
    let top = 0;
    low[0] = start;
    high[top++] = length;
    let whole = true;
    while (top > 0) {
      top--;
      const a = low[top]!;
      const b = high[top]!;
      const half = 0.5 * (b - a);
      const s = a + half;
      const x = from[0]! + s * along[0]!;
      const y = from[1]! + s * along[1]!;
      const z = from[2]! + s * along[2]!;
      const needed = enough + Math.sqrt(r * r + half * half);
      if (depthAtLeast !== undefined && depthAtLeast(x, y, z) >= needed) continue;
      if (region.depth(x, y, z) >= needed) continue;
      if (whole) {
        whole = false;
        squareUp(tube);
        look(start);
        look(length);
      }
      if (2 * half <= SPACING * r || top > 250) {
        look(s);
        continue;
      }
      low[top] = a;
      high[top++] = s;
      low[top] = s;
      high[top++] = b;
    }
    // Between two stations the depth can fall by no more than half their distance.
    if (shallowest - 0.5 * SPACING * r < enough) {
      const a = Math.max(start, place - SPACING * r);
      const b = Math.min(length, place + SPACING * r);
      shallowest = Math.min(
        shallowest,
        leastBetween(a, b, (s) => measureRing(region, tube, s, enough)),
      );
    }
    if (shallowest < Infinity) tally.see(shallowest, i);
    else tally.checked++;
  }
}

function layTube(tube: Tube, forest: Forest, row: number): void {
  const { position } = forest;
  const parent = forest.parent[row]!;
  tube.r = forest.radius[row]!;
  for (let k = 0; k < 3; k++) {
    tube.from[k] = position[3 * parent + k]!;
    tube.along[k] = position[3 * row + k]! - position[3 * parent + k]!;
  }
  tube.length = Math.hypot(tube.along[0]!, tube.along[1]!, tube.along[2]!);
  if (tube.length > 0) for (let k = 0; k < 3; k++) tube.along[k]! /= tube.length;
  else tube.along[0] = 1;
}

/** Fills in the two vectors square to a tube's axis. */
function squareUp(tube: Tube): void {
  const [ux, uy, uz] = tube.along as unknown as [number, number, number];
  // Square to the axis and to the coordinate axis least along it.
  const x = Math.abs(ux);
  const y = Math.abs(uy);
  const z = Math.abs(uz);
  const [ex, ey, ez] = x <= y && x <= z ? [0, -uz, uy] : y <= z ? [uz, 0, -ux] : [-uy, ux, 0];
  const scale = tube.r / Math.hypot(ex, ey, ez);
  const { across, aside } = tube;
  across[0] = ex * scale;
  across[1] = ey * scale;
  across[2] = ez * scale;
  aside[0] = uy * across[2]! - uz * across[1]!;
  aside[1] = uz * across[0]! - ux * across[2]!;
  aside[2] = ux * across[1]! - uy * across[0]!;
}

/** Least depth met on the axis and on the ring at s metres along a tube; above `enough` it may be a bound from below. */
function measureRing(region: Region, tube: Tube, s: number, enough: number): number {
  const { r, from, along, across, aside } = tube;
  const x = from[0]! + s * along[0]!;
  const y = from[1]! + s * along[1]!;
  const z = from[2]! + s * along[2]!;
  const middle = region.depth(x, y, z);
  // No point of the ring is more than r shallower than its centre.
  if (middle - r >= enough) return middle - r;
  const at = (angle: number) => {
    const c = Math.cos(angle);
    const d = Math.sin(angle);
    return region.depth(
      x + c * across[0]! + d * aside[0]!,
      y + c * across[1]! + d * aside[1]!,
      z + c * across[2]! + d * aside[2]!,
    );
  };
  const step = (2 * Math.PI) / AROUND;
  let best = Infinity;
  let angle = 0;
  for (let k = 0; k < AROUND; k++) {
    const depth = at(k * step);
    if (depth < best) {
      best = depth;
      angle = k * step;
    }
  }
  // No point of the circle is farther than half a step from a ring point.
  if (best - 2 * r * Math.sin(0.25 * step) < enough) {
    best = Math.min(best, leastBetween(angle - step, angle + step, at));
  }
  return Math.min(best, middle);
}

/** Least value met by golden-section search between two places. */
function leastBetween(from: number, to: number, value: (at: number) => number): number {
  const golden = 0.6180339887498949;
  let a = from;
  let b = to;
  let c = b - golden * (b - a);
  let d = a + golden * (b - a);
  let atC = value(c);
  let atD = value(d);
  let least = Math.min(atC, atD);
  for (let k = 0; k < NARROWINGS; k++) {
    if (atC < atD) {
      b = d;
      d = c;
      atD = atC;
      c = b - golden * (b - a);
      atC = value(c);
      least = Math.min(least, atC);
    } else {
      a = c;
      c = d;
      atC = atD;
      d = a + golden * (b - a);
      atD = value(d);
      least = Math.min(least, atD);
    }
  }
  return least;
}
