/*
 * Angles at which a junction of three straight tubes costs least, where a tube costs w a unit of length.
 *
 * Three forces of sizes w₀, w₁, w₂ along the tubes balance; the law of cosines in their triangle gives the angles.
 * Source: C. D. Murray (1926), J Gen Physiol 9:835–841; M. Zamir (1976, 1978), J Gen Physiol; from memory, re-derived.
 */

/** Angles in rad between each child and the parent's direction carried on. */
export interface BranchingAngles {
  readonly first: number;
  readonly second: number;
  /** Between the children. */
  readonly total: number;
}

/**
 * Best angles for given costs per length.
 *
 * @param parent w₀ > 0, any unit
 * @param first  w₁ > 0
 * @param second w₂ > 0
 * @returns      rad; the nearest flat triangle's angles where the costs make none
 */
export function anglesForWeights(parent: number, first: number, second: number): BranchingAngles {
  const one = arcCosine((parent * parent + first * first - second * second) / (2 * parent * first));
  const two = arcCosine((parent * parent + second * second - first * first) / (2 * parent * second));
  return { first: one, second: two, total: one + two };
}

/**
 * Best angles where cost goes with volume (w = r²), which is also total power between least-power tubes.
 *
 * @param parent … second: radii, m, > 0
 */
export function anglesForVolume(parent: number, first: number, second: number): BranchingAngles {
  return anglesForWeights(parent * parent, first * first, second * second);
}

/**
 * Best angles where cost goes with lumen surface (w = r), which is also drag under the cube law.
 *
 * @param parent … second: radii, m, > 0
 */
export function anglesForSurface(parent: number, first: number, second: number): BranchingAngles {
  return anglesForWeights(parent, first, second);
}

function arcCosine(x: number): number {
  return Math.acos(Math.min(1, Math.max(-1, x)));
}
