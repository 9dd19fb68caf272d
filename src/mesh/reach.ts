/**
 * How much longer than the two balls at its ends a vessel must be for its junctions to be meshed without a word:
 * length ≥ FIT_MARGIN · (ρ of one end + ρ of the other).
 */
export const FIT_MARGIN = 1.05;
/** What stands for ρ at a root or a terminal, in radii: the straight stretch before the cap. */
export const RUN_OUT = 2;

/**
 * Radius of the least ball around a node outside which two tubes that leave it are apart.
 *
 * It solves asin(a/ρ) + asin(b/ρ) = θ: the circles in which the tubes cross the sphere touch. Where the wider tube's
 * great circle is already clear of the other tube, it is the wider radius.
 *
 * @param a, b  m, > 0, radii of the two tubes
 * @param angle θ between the two axes, both leaving the node, in (0, π]
 * @returns     m, ≥ max(a, b)
 * Source: from the addition theorem for cos(α + β); common practice, no source.
 */
export function reach(a: number, b: number, angle: number): number {
  const wide = Math.max(a, b);
  const slim = Math.min(a, b);
  const cosine = Math.cos(angle);
  if (-cosine * wide >= slim) return wide;
  return Math.sqrt(a * a + b * b + 2 * a * b * cosine) / Math.sin(angle);
}
