/** Squared distance from p to the segment from a along u, where u = b − a. */
function squaredPointSegment(
  px: number,
  py: number,
  pz: number,
  ax: number,
  ay: number,
  az: number,
  ux: number,
  uy: number,
  uz: number,
): number {
  let dx = px - ax;
  let dy = py - ay;
  let dz = pz - az;
  const along = dx * ux + dy * uy + dz * uz;
  if (along > 0) {
    const square = ux * ux + uy * uy + uz * uz;
    const t = along >= square ? 1 : along / square;
    dx -= t * ux;
    dy -= t * uy;
    dz -= t * uz;
  }
  return dx * dx + dy * dy + dz * dz;
}

/** Distance from node c to the segment a–b; rows of a (3n) position column. */
export function nodeToSegment(position: ArrayLike<number>, c: number, a: number, b: number): number {
  const ax = position[3 * a]!;
  const ay = position[3 * a + 1]!;
  const az = position[3 * a + 2]!;
  return Math.sqrt(
    squaredPointSegment(
      position[3 * c]!,
      position[3 * c + 1]!,
      position[3 * c + 2]!,
      ax,
      ay,
      az,
      position[3 * b]! - ax,
      position[3 * b + 1]! - ay,
      position[3 * b + 2]! - az,
    ),
  );
}

/**
 * Least distance between the segments a–b and c–d; rows of a (3n) position column.
 *
 * The least distance is met either at an end of one segment, or inside both where the connection is square to both:
 * the five candidates are measured and the least is taken, so that every answer is the distance of two true points.
 */
export function segmentToSegment(position: ArrayLike<number>, a: number, b: number, c: number, d: number): number {
  const ax = position[3 * a]!;
  const ay = position[3 * a + 1]!;
  const az = position[3 * a + 2]!;
  const ux = position[3 * b]! - ax;
  const uy = position[3 * b + 1]! - ay;
  const uz = position[3 * b + 2]! - az;
  const cx = position[3 * c]!;
  const cy = position[3 * c + 1]!;
  const cz = position[3 * c + 2]!;
  const vx = position[3 * d]! - cx;
  const vy = position[3 * d + 1]! - cy;
  const vz = position[3 * d + 2]! - cz;
  let best = squaredPointSegment(ax, ay, az, cx, cy, cz, vx, vy, vz);
  let other = squaredPointSegment(ax + ux, ay + uy, az + uz, cx, cy, cz, vx, vy, vz);
  if (other < best) best = other;
  other = squaredPointSegment(cx, cy, cz, ax, ay, az, ux, uy, uz);
  if (other < best) best = other;
  other = squaredPointSegment(cx + vx, cy + vy, cz + vz, ax, ay, az, ux, uy, uz);
  if (other < best) best = other;

  // Square connection: n = u × v; w = c − a; s = (w × v)·n / n², t = (w × u)·n / n².
  const nx = uy * vz - uz * vy;
  const ny = uz * vx - ux * vz;
  const nz = ux * vy - uy * vx;
  const nn = nx * nx + ny * ny + nz * nz;
  if (nn > 0) {
    const wx = cx - ax;
    const wy = cy - ay;
    const wz = cz - az;
    const s = ((wy * vz - wz * vy) * nx + (wz * vx - wx * vz) * ny + (wx * vy - wy * vx) * nz) / nn;
    const t = ((wy * uz - wz * uy) * nx + (wz * ux - wx * uz) * ny + (wx * uy - wy * ux) * nz) / nn;
    if (s > 0 && s < 1 && t > 0 && t < 1) {
      const ex = wx + t * vx - s * ux;
      const ey = wy + t * vy - s * uy;
      const ez = wz + t * vz - s * uz;
      other = ex * ex + ey * ey + ez * ez;
      if (other < best) best = other;
    }
  }
  return Math.sqrt(best);
}
