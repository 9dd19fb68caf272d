/** A symmetric operator that is not negative: writes A x to `out`. */
export type Operator = (x: Float64Array, out: Float64Array) => void;

/** Growth of the squared residual over its least that ends the steps. */
const ASTRAY = 1e4;

/**
 * Solves A x = b by conjugate gradients with a diagonal preconditioner, from x as given.
 *
 * @param scale     (n) inverse of the diagonal; 0 holds an unknown where it is, and its equation is left out
 * @param tolerance of the preconditioned residual, over its first value from x = 0
 * @returns         steps taken, or the most where the residual was not met: x is then the best that was seen
 * Source: Hestenes, Stiefel (1952), doi:10.6028/jres.049.044.
 */
export function solveConjugate(
  apply: Operator,
  scale: Float64Array,
  b: Float64Array,
  x: Float64Array,
  tolerance: number,
  mostSteps: number,
): number {
  const n = b.length;
  const r = new Float64Array(n);
  const p = new Float64Array(n);
  const image = new Float64Array(n);
  apply(x, image);
  let target = 0;
  let rz = 0;
  for (let i = 0; i < n; i++) {
    const s = scale[i]!;
    r[i] = s > 0 ? b[i]! - image[i]! : 0;
    p[i] = s * r[i]!;
    rz += r[i]! * p[i]!;
    target += s * b[i]! * b[i]!;
  }
  target = Math.max(target, rz) * tolerance * tolerance;
  let least = rz;
  const best = Float64Array.from(x);
  for (let step = 0; step < mostSteps; step++) {
    if (!(rz > target)) return step;
    apply(p, image);
    let curvature = 0;
    for (let i = 0; i < n; i++) curvature += p[i]! * image[i]!;
    if (!(curvature > 0)) return step;
    const alpha = rz / curvature;
    let next = 0;
    for (let i = 0; i < n; i++) {
      const s = scale[i]!;
      if (s === 0) continue;
      x[i]! += alpha * p[i]!;
      r[i]! -= alpha * image[i]!;
      next += s * r[i]! * r[i]!;
    }
    // Equations that contradict one another by a little drive the residual up in the end.
    if (next < least) {
      least = next;
      best.set(x);
    } else if (next > ASTRAY * least) break;
    const beta = next / rz;
    rz = next;
    for (let i = 0; i < n; i++) p[i] = scale[i]! * r[i]! + beta * p[i]!;
  }
  if (least < rz) x.set(best);
  return mostSteps;
}
