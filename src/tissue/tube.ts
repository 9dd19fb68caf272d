import type { Tissue } from './tissue.ts';

/** Steps along one tube before it is refused. */
const MOST_STEPS = 256;
/** Share of the asked depth by which a tube accepted in a non-convex tissue may fall short between two looks. */
const SHORTFALL = 1e-3;

/** What is asked of a tissue or of a part of one. */
export interface Depths extends Pick<Tissue, 'convex' | 'depth' | 'deeperThan' | 'holdsTube'> {
  /** A lower bound of the depth, cheaper than `depth`, that is ≥ need wherever the depth is. */
  readonly roughDepth?: ((x: number, y: number, z: number, need: number) => number) | undefined;
}

/**
 * True if the depth is at least `need` all along a segment.
 *
 * A true answer is off by at most 10⁻³·need. In a convex tissue the two ends decide; an intersection asks each part, a
 * part taken away is settled by the convexity of the distance to it where it is convex; a union first asks for one part
 * that holds the whole tube. All else (surfaces, tubes across several parts of a union) is marched: from a point of
 * depth d the next look is d − need + 2·10⁻³·need further on, which by the Lipschitz bound leaves no point between two
 * passed looks shallower than need·(1 − 10⁻³). There a false answer may be too careful: a tube that would take more than
 * 256 looks (it runs within length/256 of the limit most of its way) is refused.
 *
 * @param need m, ≥ 0; usually radius plus gap
 * @returns    false also for NaN
 * Cost:       one `deeperThan` where the whole tube is well inside; two if convex; else 2 to 258 depths. Allocates nothing.
 */
export function tubeInside(
  tissue: Depths,
  ax: number,
  ay: number,
  az: number,
  bx: number,
  by: number,
  bz: number,
  need: number,
): boolean {
  if (tissue.convex) return tissue.deeperThan(ax, ay, az, need) && tissue.deeperThan(bx, by, bz, need);
  if (tissue.holdsTube !== undefined) return tissue.holdsTube(ax, ay, az, bx, by, bz, need);
  return marchTube(tissue, ax, ay, az, bx, by, bz, need);
}

/** The march of `tubeInside`, which holds for any tissue. */
export function marchTube(
  tissue: Depths,
  ax: number,
  ay: number,
  az: number,
  bx: number,
  by: number,
  bz: number,
  need: number,
): boolean {
  const ux = bx - ax;
  const uy = by - ay;
  const uz = bz - az;
  const length = Math.sqrt(ux * ux + uy * uy + uz * uz);
  // One ball round the middle covers most tubes of a tree.
  if (tissue.deeperThan(ax + 0.5 * ux, ay + 0.5 * uy, az + 0.5 * uz, need + 0.5 * length)) return true;
  if (!tissue.deeperThan(ax, ay, az, need)) return false;
  const far = look(tissue, bx, by, bz, need);
  if (!(far >= need)) return false;
  const spare = 2 * SHORTFALL * need;
  // The far end vouches for the last stretch before it.
  const goal = length - (far - need);
  let at = 0;
  for (let step = 0; step < MOST_STEPS; step++) {
    const t = at / length;
    const d = at === 0 ? look(tissue, ax, ay, az, need) : look(tissue, ax + t * ux, ay + t * uy, az + t * uz, need);
    if (!(d >= need)) return false;
    at += d - need + spare;
    if (at >= goal) return true;
  }
  return false;
}

function look(tissue: Depths, x: number, y: number, z: number, need: number): number {
  return tissue.roughDepth === undefined ? tissue.depth(x, y, z) : tissue.roughDepth(x, y, z, need);
}

/**
 * True if a segment keeps `need` away from a convex part. The distance along the segment is then a convex function: two
 * looks close together say on which side of them it is least, so the stretch that holds the least halves until it is
 * shorter than 2·10⁻³·need.
 *
 * @param depth of the part, positive inside it
 * Cost: up to about 50 depths for a close call, 3 for a tube well away.
 */
export function clearOfConvex(
  depth: Tissue['depth'],
  ax: number,
  ay: number,
  az: number,
  bx: number,
  by: number,
  bz: number,
  need: number,
): boolean {
  const ux = bx - ax;
  const uy = by - ay;
  const uz = bz - az;
  const length = Math.sqrt(ux * ux + uy * uy + uz * uz);
  let lo = 0;
  let hi = 1;
  let atLo = -depth(ax, ay, az);
  let atHi = -depth(bx, by, bz);
  if (!(atLo >= need && atHi >= need)) return false;
  // With need 0 the shortfall is 0: then down to the rounding of the coordinates.
  const close = Math.max(2 * SHORTFALL * need, 1e-12 * length);
  for (;;) {
    const width = (hi - lo) * length;
    if (0.5 * (atLo + atHi - width) >= need || width <= close) return true;
    const one = lo + 0.47 * (hi - lo);
    const two = lo + 0.53 * (hi - lo);
    const atOne = -depth(ax + one * ux, ay + one * uy, az + one * uz);
    if (!(atOne >= need)) return false;
    const atTwo = -depth(ax + two * ux, ay + two * uy, az + two * uz);
    if (!(atTwo >= need)) return false;
    if (atOne <= atTwo) {
      hi = two;
      atHi = atTwo;
    } else {
      lo = one;
      atLo = atOne;
    }
  }
}

/**
 * Least depth along a segment, for reports and proofs.
 *
 * @param tolerance m, > 0; taken as length/10⁵ where it is less
 * @returns m; a depth that occurs on the segment; no point of the segment is shallower than it by more than `tolerance`
 *          (exact in a convex tissue)
 * Source:  halving with the Lipschitz bound min ≥ (d₀ + d₁ − length)/2 (Piyavskii–Shubert); from memory.
 * Cost:    a few depths where the least one stands out, at most 2·length/tolerance where the depth is level.
 */
export function leastDepth(
  tissue: Tissue,
  ax: number,
  ay: number,
  az: number,
  bx: number,
  by: number,
  bz: number,
  tolerance: number,
): number {
  const d0 = tissue.depth(ax, ay, az);
  const d1 = tissue.depth(bx, by, bz);
  let least = d0 < d1 ? d0 : d1;
  if (tissue.convex) return least;
  const ux = bx - ax;
  const uy = by - ay;
  const uz = bz - az;
  const length = Math.sqrt(ux * ux + uy * uy + uz * uz);
  const allowed = Math.max(tolerance, 1e-5 * length);
  // (start, end, depth at start, depth at end) of each stretch not yet settled.
  const stack = [0, 1, d0, d1];
  while (stack.length > 0) {
    const atEnd = stack.pop()!;
    const atStart = stack.pop()!;
    const end = stack.pop()!;
    const start = stack.pop()!;
    if (0.5 * (atStart + atEnd - (end - start) * length) >= least - allowed) continue;
    const middle = 0.5 * (start + end);
    const d = tissue.depth(ax + middle * ux, ay + middle * uy, az + middle * uz);
    if (d < least) least = d;
    stack.push(start, middle, atStart, d, middle, end, d, atEnd);
  }
  return least;
}
