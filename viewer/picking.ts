/**
 * Ray against round cone, in float64, the same surface that tubes.ts draws.
 *
 * A round cone is the hull of two balls: all balls c(s) = a + s·(b − a), r(s) = ra − s·(ra − rb), 0 ≤ s ≤ 1. With
 * w = x − a, e = ra − rb, k = |b − a|² − e², the envelope of the balls is where F(s) = |w − s(b − a)|² − r(s)² and its
 * derivative in s are both zero: k(|w|² − ra²) = (w·(b − a) − ra·e)², at s = (w·(b − a) − ra·e)/k. That is a quadratic
 * along a ray; its roots count where 0 ≤ s ≤ 1. The hull is convex, so the least and the largest of all roots (envelope
 * and both balls) are where the ray enters and leaves. Where k ≤ 0 one ball holds the other.
 */

/** Where a ray from `o` along the unit vector `d` is inside; `enter` > `leave` where it misses. */
export interface Span {
  enter: number;
  leave: number;
}

function take(span: Span, t: number): void {
  if (t < span.enter) span.enter = t;
  if (t > span.leave) span.leave = t;
}

/**
 * Span of a ray in a round cone, all relative to the proximal end: w = o − a, u = b − a. Writes into `span`.
 *
 * @returns whether the ray meets it
 */
export function spanOfRoundCone(
  wx: number,
  wy: number,
  wz: number,
  dx: number,
  dy: number,
  dz: number,
  ux: number,
  uy: number,
  uz: number,
  ra: number,
  rb: number,
  span: Span,
): boolean {
  span.enter = Infinity;
  span.leave = -Infinity;
  const ww = wx * wx + wy * wy + wz * wz;
  const wd = wx * dx + wy * dy + wz * dz;
  const uu = ux * ux + uy * uy + uz * uz;
  const wu = wx * ux + wy * uy + wz * uz;
  const du = dx * ux + dy * uy + dz * uz;
  const atA = wd * wd - ww + ra * ra;
  if (atA >= 0) {
    const h = Math.sqrt(atA);
    take(span, -wd - h);
    take(span, -wd + h);
  }
  const vd = wd - du;
  const atB = vd * vd - (ww - 2 * wu + uu) + rb * rb;
  if (atB >= 0) {
    const h = Math.sqrt(atB);
    take(span, -vd - h);
    take(span, -vd + h);
  }
  const e = ra - rb;
  const k = uu - e * e;
  if (k > 0) {
    const y0 = wu - ra * e;
    const a = k - du * du;
    const b = k * wd - y0 * du;
    const c = k * (ww - ra * ra) - y0 * y0;
    const h = b * b - a * c;
    if (h >= 0) {
      // Citardauq form for one root: no cancellation, and a ray along the wall (a = 0) needs no case of its own.
      const q = -(b + (b < 0 ? -Math.sqrt(h) : Math.sqrt(h)));
      const first = q / a;
      const second = c / q;
      if (betweenEnds(y0 + first * du, k)) take(span, first);
      if (betweenEnds(y0 + second * du, k)) take(span, second);
    }
  }
  return span.enter <= span.leave;
}

function betweenEnds(y: number, k: number): boolean {
  return y >= 0 && y <= k;
}

/** A line of sight in scene units. */
export interface Ray {
  readonly origin: readonly [number, number, number];
  /** Unit vector. */
  readonly direction: readonly [number, number, number];
}

export interface PickOptions {
  /** Scene units; vessels thinner at their distal end are not drawn. */
  readonly thinnest: number;
  readonly lowestOrder: number;
  /** n·x ≤ d is kept. */
  readonly plane: readonly [number, number, number, number];
  /** Half a vessel's least drawn width in scene units: this much for each unit of distance from the origin … */
  readonly widenByDistance: number;
  /** … plus this much (a parallel projection has only this). */
  readonly widen: number;
  /** Vessels with this bit among their marks are drawn before all others, so they are met first; 0 for none. */
  readonly inFront: number;
}

/** Vessels drawn in front are so many times wider at least. */
export const FRONT_WIDENING = 2.5;

/** A vessel that a ray meets, and how far along. */
export interface Hit {
  readonly vessel: number;
  readonly distance: number;
}

/**
 * First drawn vessel along a ray, or null.
 *
 * @param ends  (8 × count or more) as in Scene
 * @param marks (2 × count or more) as in Scene
 * Cost: O(count), allocates nothing per vessel; most are turned away by their bounding ball.
 */
export function pickVessel(
  ends: Float32Array,
  marks: Uint8Array,
  count: number,
  ray: Ray,
  options: PickOptions,
): Hit | null {
  const [ox, oy, oz] = ray.origin;
  const [dx, dy, dz] = ray.direction;
  const [nx, ny, nz, nd] = options.plane;
  const { thinnest, lowestOrder, widen, widenByDistance, inFront } = options;
  const along = nx * dx + ny * dy + nz * dz;
  const side = nx * ox + ny * oy + nz * oz - nd;
  const span: Span = { enter: 0, leave: 0 };
  let vessel = -1;
  let nearest = Infinity;
  let front = false;
  for (let v = 0; v < count; v++) {
    const at = 8 * v;
    const own = ends[at + 7]!;
    if (own < thinnest || marks[2 * v + 1]! < lowestOrder) continue;
    const first = (marks[2 * v]! & inFront) !== 0;
    if (front && !first) continue;
    const wx = ox - ends[at]!;
    const wy = oy - ends[at + 1]!;
    const wz = oz - ends[at + 2]!;
    const ux = ends[at + 4]! - ends[at]!;
    const uy = ends[at + 5]! - ends[at + 1]!;
    const uz = ends[at + 6]! - ends[at + 2]!;
    const mx = wx - 0.5 * ux;
    const my = wy - 0.5 * uy;
    const mz = wz - 0.5 * uz;
    const mm = mx * mx + my * my + mz * mz;
    const md = mx * dx + my * dy + mz * dz;
    const least = (first ? FRONT_WIDENING : 1) * (widen + widenByDistance * Math.sqrt(mm));
    const ra = Math.max(ends[at + 3]!, least);
    const rb = Math.max(own, least);
    const ball = 0.5 * Math.sqrt(ux * ux + uy * uy + uz * uz) + Math.max(ra, rb);
    if (mm - md * md > ball * ball || (first === front && -md - ball > nearest)) continue;
    if (!spanOfRoundCone(wx, wy, wz, dx, dy, dz, ux, uy, uz, ra, rb, span)) continue;
    let t = span.enter;
    if (side + along * t > 0) {
      if (!(along < 0)) continue;
      t = -side / along;
      if (t > span.leave) continue;
    }
    if (t > 0 && (t < nearest || first !== front)) {
      nearest = t;
      vessel = v;
      front = first;
    }
  }
  return vessel < 0 ? null : { vessel, distance: nearest };
}
