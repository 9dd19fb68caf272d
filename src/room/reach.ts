/** Tubes must be this much longer than the two balls at their ends, so that a mesh has a stretch of plain tube between. */
export const FIT_MARGIN = 1.05;
/** Straight run-out at a root or a terminal, in radii, counted like a ball. */
export const RUN_OUT = 2;

/**
 * Radius of the least ball around a node outside which two tubes that leave it are apart: the circles in which they
 * cross the sphere touch, asin(a/ρ) + asin(b/ρ) = θ.
 *
 * @param a, b   m, > 0, radii of the two tubes
 * @param cosine of the angle θ between them, in [−1, 1)
 * @returns m, ≥ max(a, b); Infinity for parallel tubes
 * Source: addition theorem, cos θ = cos α cos β − sin α sin β squared; where even the wider tube's great circle
 *         (α = 90°) is clear of the other, the wider radius itself.
 */
export function separationReach(a: number, b: number, cosine: number): number {
  const wide = a > b ? a : b;
  const slim = a > b ? b : a;
  if (-cosine * wide >= slim) return wide;
  const sineSquared = 1 - cosine * cosine;
  if (!(sineSquared > 0)) return cosine > 0 ? Infinity : wide;
  return Math.sqrt((a * a + b * b + 2 * a * b * cosine) / sineSquared);
}
