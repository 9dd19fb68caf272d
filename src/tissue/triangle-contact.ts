/*
 * Do two triangles of a surface meet where they should not? Signs of determinants are taken as zero within the bound
 * of their rounding error, and zero counts as contact: a touch at rounding distance is refused like a crossing.
 * Corners are given as offsets (3 × row) into `p`.
 */

/** Error bounds of the two determinants as shares of the sum of their terms' sizes: J. R. Shewchuk (1997), from memory. */
const SPACE_ERROR = 7.8e-16;
const PLANE_ERROR = 3.4e-16;

/** Sign of the volume of the tetrahedron a, b, c, d: positive where d sees a, b, c clockwise. */
export function spaceSide(p: Float64Array, a: number, b: number, c: number, d: number): number {
  const ax = p[a]! - p[d]!;
  const ay = p[a + 1]! - p[d + 1]!;
  const az = p[a + 2]! - p[d + 2]!;
  const bx = p[b]! - p[d]!;
  const by = p[b + 1]! - p[d + 1]!;
  const bz = p[b + 2]! - p[d + 2]!;
  const cx = p[c]! - p[d]!;
  const cy = p[c + 1]! - p[d + 1]!;
  const cz = p[c + 2]! - p[d + 2]!;
  const bc = bx * cy;
  const cb = cx * by;
  const ca = cx * ay;
  const ac = ax * cy;
  const ab = ax * by;
  const ba = bx * ay;
  const det = az * (bc - cb) + bz * (ca - ac) + cz * (ab - ba);
  const size =
    Math.abs(az) * (Math.abs(bc) + Math.abs(cb)) +
    Math.abs(bz) * (Math.abs(ca) + Math.abs(ac)) +
    Math.abs(cz) * (Math.abs(ab) + Math.abs(ba));
  return det > SPACE_ERROR * size ? 1 : det < -SPACE_ERROR * size ? -1 : 0;
}

/** Sign of the area of a, b, c seen along the third axis when u and v (0, 1, 2) are the other two. */
function planeSide(p: Float64Array, u: number, v: number, a: number, b: number, c: number): number {
  const left = (p[a + u]! - p[c + u]!) * (p[b + v]! - p[c + v]!);
  const right = (p[a + v]! - p[c + v]!) * (p[b + u]! - p[c + u]!);
  const det = left - right;
  const bound = PLANE_ERROR * (Math.abs(left) + Math.abs(right));
  return det > bound ? 1 : det < -bound ? -1 : 0;
}

/** Axis along which triangle a, b, c shows its largest area. */
function dropAxis(p: Float64Array, a: number, b: number, c: number): number {
  const ux = p[b]! - p[a]!;
  const uy = p[b + 1]! - p[a + 1]!;
  const uz = p[b + 2]! - p[a + 2]!;
  const vx = p[c]! - p[a]!;
  const vy = p[c + 1]! - p[a + 1]!;
  const vz = p[c + 2]! - p[a + 2]!;
  const nx = Math.abs(uy * vz - uz * vy);
  const ny = Math.abs(uz * vx - ux * vz);
  const nz = Math.abs(ux * vy - uy * vx);
  return nx > ny ? (nx > nz ? 0 : 2) : ny > nz ? 1 : 2;
}

/** True where the line through i, j (an edge of a triangle whose third corner is k) keeps q and r strictly off the triangle. */
function edgeParts(
  p: Float64Array,
  u: number,
  v: number,
  i: number,
  j: number,
  k: number,
  q: number,
  r: number,
): boolean {
  const own = planeSide(p, u, v, i, j, k);
  return own * planeSide(p, u, v, i, j, q) < 0 && own * planeSide(p, u, v, i, j, r) < 0;
}

/** Segment q–r against triangle a, b, c, all in one plane. */
function flatSegmentMeets(p: Float64Array, q: number, r: number, a: number, b: number, c: number): boolean {
  const drop = dropAxis(p, a, b, c);
  const u = drop === 0 ? 1 : 0;
  const v = drop === 2 ? 1 : 2;
  if (edgeParts(p, u, v, a, b, c, q, r)) return false;
  if (edgeParts(p, u, v, b, c, a, q, r)) return false;
  if (edgeParts(p, u, v, c, a, b, q, r)) return false;
  const sa = planeSide(p, u, v, q, r, a);
  const sb = planeSide(p, u, v, q, r, b);
  const sc = planeSide(p, u, v, q, r, c);
  return !(sa !== 0 && sa === sb && sb === sc);
}

/** Segment q–r against triangle a, b, c; touching counts. */
function segmentMeets(p: Float64Array, q: number, r: number, a: number, b: number, c: number): boolean {
  const sq = spaceSide(p, a, b, c, q);
  const sr = spaceSide(p, a, b, c, r);
  if (sq * sr > 0) return false;
  if (sq === 0 && sr === 0) return flatSegmentMeets(p, q, r, a, b, c);
  const ab = spaceSide(p, q, r, a, b);
  const bc = spaceSide(p, q, r, b, c);
  const ca = spaceSide(p, q, r, c, a);
  return !((ab > 0 || bc > 0 || ca > 0) && (ab < 0 || bc < 0 || ca < 0));
}

/** Triangles with no corner in common: true where they touch or cross. */
export function apartMeet(p: Float64Array, a: number, b: number, c: number, d: number, e: number, f: number): boolean {
  const sd = spaceSide(p, a, b, c, d);
  const se = spaceSide(p, a, b, c, e);
  const sf = spaceSide(p, a, b, c, f);
  if (sd !== 0 && sd === se && se === sf) return false;
  const sa = spaceSide(p, d, e, f, a);
  const sb = spaceSide(p, d, e, f, b);
  const sc = spaceSide(p, d, e, f, c);
  if (sa !== 0 && sa === sb && sb === sc) return false;
  return (
    segmentMeets(p, a, b, d, e, f) ||
    segmentMeets(p, b, c, d, e, f) ||
    segmentMeets(p, c, a, d, e, f) ||
    segmentMeets(p, d, e, a, b, c) ||
    segmentMeets(p, e, f, a, b, c) ||
    segmentMeets(p, f, d, a, b, c)
  );
}

/** Triangles s, a, b and s, d, e with only corner s in common: true where they meet anywhere else. */
export function cornerMeet(p: Float64Array, s: number, a: number, b: number, d: number, e: number): boolean {
  return segmentMeets(p, a, b, s, d, e) || segmentMeets(p, d, e, s, a, b);
}

/** Triangles s, t, a and t, s, d with edge s–t in common: true where one is folded flat on the other. */
export function edgeMeet(p: Float64Array, s: number, t: number, a: number, d: number): boolean {
  if (spaceSide(p, s, t, a, d) !== 0) return false;
  // In one plane: folded where both apexes lie on the same side of the edge.
  const drop = dropAxis(p, s, t, a);
  const u = drop === 0 ? 1 : 0;
  const v = drop === 2 ? 1 : 2;
  return planeSide(p, u, v, s, t, a) * planeSide(p, u, v, s, t, d) >= 0;
}
