import type { Tissue } from '../tissue/tissue.ts';
import { tubeInside } from '../tissue/tube.ts';

const DEEPEST = 4;

/**
 * A way for a tube between two points that stays in a tissue which a straight one would leave: the middle of a leg that
 * leaves is pushed inwards along the slope of depth until it is deep enough, then both halves are looked at again.
 *
 * @param need m, depth that every point of the way must have
 * @returns (3k) coordinates of the k ≥ 0 bends between a and b, or null where this finds no way
 * Cost: up to 2^4 legs.
 */
export function routeInside(
  tissue: Tissue,
  a: readonly [number, number, number],
  b: readonly [number, number, number],
  need: number,
): number[] | null {
  const bends: number[] = [];
  return leg(tissue, a, b, need, DEEPEST, bends) ? bends : null;
}

type Point = readonly [number, number, number];

function leg(tissue: Tissue, a: Point, b: Point, need: number, left: number, bends: number[]): boolean {
  if (tubeInside(tissue, a[0], a[1], a[2], b[0], b[1], b[2], need)) return true;
  if (left === 0) return false;
  const middle = pushInwards(tissue, [0.5 * (a[0] + b[0]), 0.5 * (a[1] + b[1]), 0.5 * (a[2] + b[2])], need, a, b);
  if (middle === null) return false;
  if (!leg(tissue, a, middle, need, left - 1, bends)) return false;
  bends.push(middle[0], middle[1], middle[2]);
  return leg(tissue, middle, b, need, left - 1, bends);
}

/** Climbs the slope of depth from a point, as much as it can across the leg, until it is deeper than needed. */
function pushInwards(tissue: Tissue, start: Point, need: number, a: Point, b: Point): Point | null {
  let [x, y, z] = start;
  const length = Math.sqrt(
    (b[0] - a[0]) * (b[0] - a[0]) + (b[1] - a[1]) * (b[1] - a[1]) + (b[2] - a[2]) * (b[2] - a[2]),
  );
  const ux = (b[0] - a[0]) / length;
  const uy = (b[1] - a[1]) / length;
  const uz = (b[2] - a[2]) / length;
  const step = 1e-3 * length + 1e-2 * need;
  const wanted = 1.2 * need;
  for (let k = 0; k < 60; k++) {
    const depth = tissue.depth(x, y, z);
    if (depth >= wanted) return [x, y, z];
    let gx = tissue.depth(x + step, y, z) - tissue.depth(x - step, y, z);
    let gy = tissue.depth(x, y + step, z) - tissue.depth(x, y - step, z);
    let gz = tissue.depth(x, y, z + step) - tissue.depth(x, y, z - step);
    const along = gx * ux + gy * uy + gz * uz;
    // Going along the leg only makes one half longer; keep a little of it for corners.
    gx -= 0.8 * along * ux;
    gy -= 0.8 * along * uy;
    gz -= 0.8 * along * uz;
    const size = Math.sqrt(gx * gx + gy * gy + gz * gz);
    if (!(size > 0)) return null;
    const far = Math.max(wanted - depth, 0.2 * need);
    x += (far * gx) / size;
    y += (far * gy) / size;
    z += (far * gz) / size;
  }
  return null;
}
