import type { Tissue } from './tissue.ts';

/** Steps along one tube before it is refused. */
const MOST_STEPS = 256;
/** Share of the asked depth by which a tube accepted in a non-convex tissue may fall short between two looks. */
const SHORTFALL = 1e-3;

/**
 * True if the depth is at least `need` all along a segment.
 *
 * In a convex tissue the two ends decide. Elsewhere the segment is marched: from a point of depth d the next look is
 * d − need + 2·10⁻³·need further on, which by the Lipschitz bound leaves no point between two passed looks shallower
 * than need·(1 − 10⁻³). A true answer is therefore off by at most 10⁻³·need; a false one may be too careful: a tube
 * that would take more than 256 looks (it runs within length/256 of the limit most of its way) is refused.
 *
 * @param need m, ≥ 0; usually radius plus gap
 * @returns    false also for NaN
 * Cost:       one `deeperThan` where the whole tube is well inside; two if convex; else 2 to 258 depths. Allocates nothing.
 */
export function tubeInside(
  tissue: Tissue,
  ax: number,
  ay: number,
  az: number,
  bx: number,
  by: number,
  bz: number,
  need: number,
): boolean {
  if (tissue.convex) return tissue.deeperThan(ax, ay, az, need) && tissue.deeperThan(bx, by, bz, need);
  const ux = bx - ax;
  const uy = by - ay;
  const uz = bz - az;
  const length = Math.sqrt(ux * ux + uy * uy + uz * uz);
  // One ball round the middle covers most tubes of a tree.
  if (tissue.deeperThan(ax + 0.5 * ux, ay + 0.5 * uy, az + 0.5 * uz, need + 0.5 * length)) return true;
  if (!tissue.deeperThan(ax, ay, az, need)) return false;
  const far = tissue.depth(bx, by, bz);
  if (!(far >= need)) return false;
  const spare = 2 * SHORTFALL * need;
  // The far end vouches for the last stretch before it.
  const goal = length - (far - need);
  let at = 0;
  for (let step = 0; step < MOST_STEPS; step++) {
    const t = at / length;
    const d = at === 0 ? tissue.depth(ax, ay, az) : tissue.depth(ax + t * ux, ay + t * uy, az + t * uz);
    if (!(d >= need)) return false;
    at += d - need + spare;
    if (at >= goal) return true;
  }
  return false;
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
