import { fermatPoint } from '../physics/fermat.ts';
import { FIT_MARGIN, separationReach } from '../room/reach.ts';
import type { Room } from '../room/room.ts';
import type { ForestBuilder } from '../tree/builder.ts';
import { LENIENT, Preview } from './preview.ts';
import { span } from './span.ts';

/*
 * Lab notes (ellipsoid, 10,000 terminals, 5 % vessel volume, γ = 3, December 2026):
 * - Straight towards the best place only (all the way, 1/2, 1/4, 1/10): thorough refinement ends at 4.267 Σ Q^(2/3) L over
 *   the cube root of the tissue's volume. With the slants below, when the straight way is blocked: 4.207. With them in the
 *   sweeps of growth too: 4.135. (Without any vessel in another's way: 3.50.)
 */

/** Shares of the straight way that are tried. */
const STEPS = [1, 0.5, 0.25, 0.1] as const;
/** Share of the way, and what is gone to the side for each part of it, where the straight way is blocked. */
const SLANTS = [
  [0.6, 0.6],
  [0.4, 1.2],
  [0.2, 1.2],
  [0.15, 2.5],
  [0.05, 2],
] as const;
const COSINES = [1, 0.5, -0.5, -1, -0.5, 0.5] as const;
const HALF_ROOT_THREE = 0.8660254037844386;
const SINES = [0, HALF_ROOT_THREE, HALF_ROOT_THREE, 0, -HALF_ROOT_THREE, -HALF_ROOT_THREE] as const;
const SIDES = COSINES.length * SLANTS.length;

/** Radii that other tubes are taken with over today's, where there is to be slack. */
const OTHERS = 1.05;

/** Cost per length of the tube that ends at a row. */
export type TubeWeight = (row: number) => number;

/**
 * Looks where a node would stand better: as near to where its tubes cost least as there is room. Changes nothing, so many
 * looks may be taken at one forest at once.
 *
 * With radii fixed a tube costs w·L, so a junction's best place is the weighted Fermat point of its neighbours, a bend's
 * the straight line between them. The cost is convex: part of the way is cheaper too.
 */
export class NodeLook {
  /** (3) m; the place found by the last `look`. */
  readonly place = new Float64Array(3);
  private readonly builder: ForestBuilder;
  private readonly room: Room;
  private readonly preview: Preview;
  private readonly slack: number;
  private readonly target = new Float64Array(3);
  private readonly side = new Float64Array(3 * SIDES);
  private readonly found = new Float64Array(SIDES);
  // The node in hand: its neighbours and what a length of its tubes costs.
  private row = -1;
  private top = -1;
  private a = -1;
  private b = -1;
  private wt = 0;
  private wa = 0;
  private wb = 0;

  /** @param slack radii that the moved tubes are taken with over today's, ≥ 1: room that is left for growth */
  constructor(builder: ForestBuilder, room: Room, slack: number) {
    this.builder = builder;
    this.room = room;
    this.preview = new Preview(builder, room);
    this.slack = slack;
    this.preview.shrink = slack === 1 ? 1 : OTHERS;
  }

  /**
   * Looks for a better place for a junction or a bend; roots, stubs and terminals have none.
   *
   * @param least share of its tubes' cost below which a gain is not worth a look, ≥ 0
   * @returns whether there is one; it is in `place`
   */
  look(row: number, weight: TubeWeight, least: number): boolean {
    if (!this.take(row, weight)) return false;
    const { target, place } = this;
    const p = this.builder.position;
    const x = p[3 * row]!;
    const y = p[3 * row + 1]!;
    const z = p[3 * row + 2]!;
    const before = this.costAt(x, y, z);
    const best = this.costAt(target[0]!, target[1]!, target[2]!);
    if (!(before - best > least * before)) return false;
    for (const step of STEPS) {
      const nx = x + step * (target[0]! - x);
      const ny = y + step * (target[1]! - y);
      const nz = z + step * (target[2]! - z);
      if (!(this.costAt(nx, ny, nz) < before * (1 - 1e-12))) continue;
      if (!this.fitsAt(nx, ny, nz)) continue;
      place[0] = nx;
      place[1] = ny;
      place[2] = nz;
      return true;
    }
    return this.lookAside(x, y, z, before * (1 - Math.max(least, 1e-6)));
  }

  /** Whether a node's tubes would cost less with the node at a place. */
  gains(row: number, weight: TubeWeight, x: number, y: number, z: number): boolean {
    if (!this.take(row, weight)) return false;
    const p = this.builder.position;
    return this.costAt(x, y, z) < this.costAt(p[3 * row]!, p[3 * row + 1]!, p[3 * row + 2]!) * (1 - 1e-12);
  }

  /** Takes a node in hand and finds its best place, whatever stands there; false for one that may not move. */
  private take(row: number, weight: TubeWeight): boolean {
    const { builder, room, target } = this;
    const top = builder.parent[row]!;
    const a = builder.child[2 * row]!;
    if (top < 0 || a < 0 || room.pinned.has(row)) return false;
    const b = builder.child[2 * row + 1]!;
    this.row = row;
    this.top = top;
    this.a = a;
    this.b = b;
    const p = builder.position;
    const tx = p[3 * top]!;
    const ty = p[3 * top + 1]!;
    const tz = p[3 * top + 2]!;
    const ax = p[3 * a]!;
    const ay = p[3 * a + 1]!;
    const az = p[3 * a + 2]!;
    if (b >= 0) {
      this.wt = weight(row);
      this.wa = weight(a);
      this.wb = weight(b);
      const bx = p[3 * b]!;
      const by = p[3 * b + 1]!;
      const bz = p[3 * b + 2]!;
      fermatPoint(tx, ty, tz, ax, ay, az, bx, by, bz, this.wt, this.wa, this.wb, target);
      return true;
    }
    this.wt = 1;
    this.wa = 1;
    this.wb = 0;
    const ux = ax - tx;
    const uy = ay - ty;
    const uz = az - tz;
    const along = (p[3 * row]! - tx) * ux + (p[3 * row + 1]! - ty) * uy + (p[3 * row + 2]! - tz) * uz;
    const t = along / (ux * ux + uy * uy + uz * uz);
    if (!(t > 0 && t < 1)) return false;
    target[0] = tx + t * ux;
    target[1] = ty + t * uy;
    target[2] = tz + t * uz;
    return true;
  }

  /** Tries to slip past what stands in the straight way, half way and less, at slants all round, the cheapest place first. */
  private lookAside(x: number, y: number, z: number, below: number): boolean {
    const { target, side, found, place } = this;
    const ux = target[0]! - x;
    const uy = target[1]! - y;
    const uz = target[2]! - z;
    const far = span(ux, uy, uz);
    // Two directions square to the way: from the axis that it runs along least.
    const flat =
      Math.abs(ux) <= Math.abs(uy) && Math.abs(ux) <= Math.abs(uz) ? 0 : Math.abs(uy) <= Math.abs(uz) ? 1 : 2;
    const ex = flat === 0 ? 1 : 0;
    const ey = flat === 1 ? 1 : 0;
    const ez = flat === 2 ? 1 : 0;
    let vx = uy * ez - uz * ey;
    let vy = uz * ex - ux * ez;
    let vz = ux * ey - uy * ex;
    const v = far / span(vx, vy, vz);
    vx *= v;
    vy *= v;
    vz *= v;
    const wx = (uy * vz - uz * vy) / far;
    const wy = (uz * vx - ux * vz) / far;
    const wz = (ux * vy - uy * vx) / far;
    let count = 0;
    for (const [step, slope] of SLANTS) {
      for (let k = 0; k < COSINES.length; k++) {
        const c = slope * COSINES[k]!;
        const s = slope * SINES[k]!;
        const nx = x + step * (ux + c * vx + s * wx);
        const ny = y + step * (uy + c * vy + s * wy);
        const nz = z + step * (uz + c * vz + s * wz);
        const cost = this.costAt(nx, ny, nz);
        if (!(cost < below)) continue;
        let at = count++;
        for (; at > 0 && found[at - 1]! > cost; at--) {
          found[at] = found[at - 1]!;
          for (let i = 0; i < 3; i++) side[3 * at + i] = side[3 * at - 3 + i]!;
        }
        found[at] = cost;
        side[3 * at] = nx;
        side[3 * at + 1] = ny;
        side[3 * at + 2] = nz;
      }
    }
    for (let k = 0; k < count; k++) {
      if (!this.fitsAt(side[3 * k]!, side[3 * k + 1]!, side[3 * k + 2]!)) continue;
      for (let i = 0; i < 3; i++) place[i] = side[3 * k + i]!;
      return true;
    }
    return false;
  }

  /** Whether all that moving the node in hand would touch fits, as wide as slack asks. */
  private fitsAt(x: number, y: number, z: number): boolean {
    const { builder, preview, row, top, a, b, slack } = this;
    const p = builder.position;
    const r = slack * builder.radius(row);
    const ra = slack * builder.radius(a);
    const rb = b < 0 ? 0 : slack * builder.radius(b);
    const tx = p[3 * top]!;
    const ty = p[3 * top + 1]!;
    const tz = p[3 * top + 2]!;
    const ax = p[3 * a]!;
    const ay = p[3 * a + 1]!;
    const az = p[3 * a + 2]!;
    const bx = b < 0 ? 0 : p[3 * b]!;
    const by = b < 0 ? 0 : p[3 * b + 1]!;
    const bz = b < 0 ? 0 : p[3 * b + 2]!;
    const lt = span(tx - x, ty - y, tz - z);
    const la = span(ax - x, ay - y, az - z);
    const lb = b < 0 ? 0 : span(bx - x, by - y, bz - z);
    const limits = this.room.limits;
    const ta = ((tx - x) * (ax - x) + (ty - y) * (ay - y) + (tz - z) * (az - z)) / (lt * la);
    if (!(ta <= (b < 0 ? limits.cosMinBend : limits.cosMinAngle))) return false;
    let ball = separationReach(r, ra, ta);
    if (b >= 0) {
      const tb = ((tx - x) * (bx - x) + (ty - y) * (by - y) + (tz - z) * (bz - z)) / (lt * lb);
      const ab = ((ax - x) * (bx - x) + (ay - y) * (by - y) + (az - z) * (bz - z)) / (la * lb);
      if (!(tb <= limits.cosMinAngle && ab <= limits.cosMinAngle)) return false;
      ball = Math.max(ball, separationReach(r, rb, tb), separationReach(ra, rb, ab));
    }
    const margin = LENIENT * FIT_MARGIN;
    if (lt < margin * ball || la < margin * ball || (b >= 0 && lb < margin * ball)) return false;
    const ballT = preview.ballWith(top, row, x, y, z, r);
    if (ballT < 0 || lt < margin * (ball + ballT)) return false;
    const ballA = preview.ballWith(a, row, x, y, z, ra);
    if (ballA < 0 || la < margin * (ball + ballA)) return false;
    if (b >= 0) {
      const ballB = preview.ballWith(b, row, x, y, z, rb);
      if (ballB < 0 || lb < margin * (ball + ballB)) return false;
      if (!preview.sparesOthers(b, row, ballB)) return false;
    }
    if (!preview.sparesOthers(top, row, ballT) || !preview.sparesOthers(a, row, ballA)) return false;
    return (
      this.standsFree(tx, ty, tz, x, y, z, r, top) &&
      this.standsFree(x, y, z, ax, ay, az, ra, a) &&
      (b < 0 || this.standsFree(x, y, z, bx, by, bz, rb, b))
    );
  }

  /** Whether a tube between the node in hand and a neighbour would be clear and in the tissue. */
  private standsFree(
    ax: number,
    ay: number,
    az: number,
    bx: number,
    by: number,
    bz: number,
    radius: number,
    neighbour: number,
  ): boolean {
    const { preview, row } = this;
    return (
      preview.clear(ax, ay, az, bx, by, bz, radius, -1, neighbour, row) &&
      preview.inside(ax, ay, az, bx, by, bz, radius)
    );
  }

  private costAt(x: number, y: number, z: number): number {
    const { top, a, b } = this;
    const p = this.builder.position;
    let cost = this.wt * span(x - p[3 * top]!, y - p[3 * top + 1]!, z - p[3 * top + 2]!);
    cost += this.wa * span(x - p[3 * a]!, y - p[3 * a + 1]!, z - p[3 * a + 2]!);
    if (b >= 0) cost += this.wb * span(x - p[3 * b]!, y - p[3 * b + 1]!, z - p[3 * b + 2]!);
    return cost;
  }
}
