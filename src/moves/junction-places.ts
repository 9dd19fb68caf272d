import { fermatPoint } from '../physics/fermat.ts';
import { FIT_MARGIN, RUN_OUT, separationReach } from '../room/reach.ts';
import type { Room } from '../room/room.ts';
import type { ForestBuilder } from '../tree/builder.ts';
import type { PerLength } from './per-length.ts';
import type { Preview } from './preview.ts';
import { span } from './span.ts';

/*
 * Notation: A→B the tube, J the junction on it, S the site; ab, as, bs cosines of the angles between J's three tubes.
 *
 * Lab notes (box, γ = 3, one thread of a busy two-core machine, December 2026):
 * - A collapsed junction thrown 10 % of the way to the other two, and the way up by the differential (see potential.ts):
 *   6 to 10 % dearer than the plain twin at 60 terminals; moved just as far as its balls ask, within 2 %.
 */

const MOST_PLACES = 4;

/**
 * Where on a tube, or near it, the junction of a new vessel may go: the best place by the closed form, on the tube at two
 * heights, and part of the way to the site; each moved until the three tubes are as long as their junctions' balls ask.
 * What else stands in the way is not asked here.
 */
export class JunctionPlaces {
  /** (4, 3) m; places last found. */
  readonly at = new Float64Array(3 * MOST_PLACES);
  /** (4) m; the ball of the junction at each. */
  readonly ball = new Float64Array(MOST_PLACES);
  /** (4) 1 where the junction lies on the tube as it is. */
  readonly onTube = new Uint8Array(MOST_PLACES);
  /** m; radii that the tubes above, below and to the side of the junction would have. */
  above = 0;
  below = 0;
  own = 0;
  /** Lengths that a place is given over those that would just do, > 1: tubes that are as short as can be cannot gain flow. */
  slack = 1.01;
  private ballA = 0;
  private ballB = 0;
  private readonly builder: ForestBuilder;
  private readonly room: Room;
  private readonly preview: Preview;
  private readonly perLength: PerLength;
  private readonly point = new Float64Array(3);

  constructor(builder: ForestBuilder, room: Room, preview: Preview, perLength: PerLength) {
    this.perLength = perLength;
    this.builder = builder;
    this.room = room;
    this.preview = preview;
  }

  /**
   * Junction places worth a try for a site on a tube.
   *
   * @param row   the tube's lower node
   * @param share flow share of the new terminal, > 0
   * @param run   radii that its far end needs: a terminal's run-out, or the ball of a subtree over its radius
   * @param shrink radius of a tube that gains nothing, over what it is now: a new terminal makes all others' part less
   * @returns     number of places, 0 to 4; they are in `at`, best first, until the next call
   */
  find(row: number, x: number, y: number, z: number, share: number, run = RUN_OUT, shrink = 1): number {
    const { builder, point, preview } = this;
    const p = builder.position;
    const parent = builder.parent[row]!;
    const load = builder.load[row]!;
    const tree = builder.tree[row]!;
    const grown = shrink * builder.radius(row);
    this.below = grown;
    this.above = grown * this.rootOf((load + share) / load);
    this.own = grown * this.rootOf(share / load);
    const ballS = run * this.own;
    const ax = p[3 * parent]!;
    const ay = p[3 * parent + 1]!;
    const az = p[3 * parent + 2]!;
    const bx = p[3 * row]!;
    const by = p[3 * row + 1]!;
    const bz = p[3 * row + 2]!;
    // As the tube runs today; how it will run is looked at once the junction has a place.
    this.ballA = Math.max(preview.ballWith(parent, row, bx, by, bz, this.above), this.above);
    this.ballB = Math.max(preview.ballWith(row, parent, ax, ay, az, grown), grown);
    fermatPoint(
      ax,
      ay,
      az,
      bx,
      by,
      bz,
      x,
      y,
      z,
      this.perLength(load + share, tree),
      this.perLength(load, tree),
      this.perLength(share, tree),
      point,
    );
    let count = 0;
    const jx = point[0]!;
    const jy = point[1]!;
    const jz = point[2]!;
    count = this.keepPlace(count, row, jx, jy, jz, x, y, z, ballS);
    // On the tube itself: only the new side vessel can be in anybody's way.
    const ux = bx - ax;
    const uy = by - ay;
    const uz = bz - az;
    const uu = ux * ux + uy * uy + uz * uz;
    let t = uu > 0 ? ((jx - ax) * ux + (jy - ay) * uy + (jz - az) * uz) / uu : 0;
    t = t < 0.25 ? 0.25 : t > 0.75 ? 0.75 : t;
    const free = count;
    count = this.keepPlace(count, row, ax + t * ux, ay + t * uy, az + t * uz, x, y, z, ballS);
    const s = t < 0.5 ? 0.7 : 0.3;
    count = this.keepPlace(count, row, ax + s * ux, ay + s * uy, az + s * uz, x, y, z, ballS);
    this.onTube.fill(0);
    for (let k = free; k < count; k++) this.onTube[k] = this.liesOn(k, ax, ay, az, ux, uy, uz) ? 1 : 0;
    // Half way to the site, which leaves room at the tube.
    count = this.keepPlace(count, row, 0.6 * jx + 0.4 * x, 0.6 * jy + 0.4 * y, 0.6 * jz + 0.4 * z, x, y, z, ballS);
    return count;
  }

  /** Moves a junction off its three neighbours until each tube is as long as its balls ask, and keeps it if it can be. */
  private keepPlace(
    count: number,
    row: number,
    jx: number,
    jy: number,
    jz: number,
    x: number,
    y: number,
    z: number,
    ballS: number,
  ): number {
    const { builder, room, above, own, ballA, ballB } = this;
    const grown = this.below;
    const p = builder.position;
    const parent = builder.parent[row]!;
    for (let pass = 0; pass < 6; pass++) {
      let ax = p[3 * parent]! - jx;
      let ay = p[3 * parent + 1]! - jy;
      let az = p[3 * parent + 2]! - jz;
      const a = span(ax, ay, az);
      let bx = p[3 * row]! - jx;
      let by = p[3 * row + 1]! - jy;
      let bz = p[3 * row + 2]! - jz;
      const b = span(bx, by, bz);
      let sx = x - jx;
      let sy = y - jy;
      let sz = z - jz;
      const c = span(sx, sy, sz);
      const hair = 1e-9 * room.span;
      if (a < hair || b < hair || c < hair) {
        // On a neighbour (a collapsed junction): a hair towards the other two, so that directions have a meaning and
        // the push below finds the least distance that will do.
        const wb = b < hair ? 0 : 1 / b;
        const wa = a < hair ? 0 : 1 / a;
        const wc = c < hair ? 0 : 1 / c;
        const hx = wa * ax + wb * bx + wc * sx;
        const hy = wa * ay + wb * by + wc * sy;
        const hz = wa * az + wb * bz + wc * sz;
        const h = span(hx, hy, hz);
        if (!(h > 1e-6)) return count;
        const step = (4 * hair) / h;
        jx += step * hx;
        jy += step * hy;
        jz += step * hz;
        continue;
      }
      ax /= a;
      ay /= a;
      az /= a;
      bx /= b;
      by /= b;
      bz /= b;
      sx /= c;
      sy /= c;
      sz /= c;
      const ab = ax * bx + ay * by + az * bz;
      const as = ax * sx + ay * sy + az * sz;
      const bs = bx * sx + by * sy + bz * sz;
      const least = room.limits.cosMinAngle;
      const ball = Math.max(
        separationReach(above, grown, Math.min(ab, least)),
        separationReach(above, own, Math.min(as, least)),
        separationReach(grown, own, Math.min(bs, least)),
      );
      const needA = this.slack * FIT_MARGIN * (ballA + ball);
      const needB = this.slack * FIT_MARGIN * (ballB + ball);
      const needS = this.slack * FIT_MARGIN * (ballS + ball);
      if (a >= needA && b >= needB && c >= needS) {
        if (ab > least || as > least || bs > least) return count;
        this.at[3 * count] = jx;
        this.at[3 * count + 1] = jy;
        this.at[3 * count + 2] = jz;
        this.ball[count] = ball;
        return count + 1;
      }
      if (a + b < needA + needB && a + c < needA + needS && b + c < needB + needS) return count;
      const pushA = a < needA ? a - needA : 0;
      const pushB = b < needB ? b - needB : 0;
      const pushS = c < needS ? c - needS : 0;
      jx += 1.05 * (pushA * ax + pushB * bx + pushS * sx);
      jy += 1.05 * (pushA * ay + pushB * by + pushS * sy);
      jz += 1.05 * (pushA * az + pushB * bz + pushS * sz);
    }
    return count;
  }

  /** Whether place k is, to rounding, on the line from a along u. */
  private liesOn(k: number, ax: number, ay: number, az: number, ux: number, uy: number, uz: number): boolean {
    const dx = this.at[3 * k]! - ax;
    const dy = this.at[3 * k + 1]! - ay;
    const dz = this.at[3 * k + 2]! - az;
    const cx = dy * uz - dz * uy;
    const cy = dz * ux - dx * uz;
    const cz = dx * uy - dy * ux;
    const uu = ux * ux + uy * uy + uz * uz;
    return cx * cx + cy * cy + cz * cz <= 1e-18 * uu * uu;
  }

  private rootOf(ratio: number): number {
    const { exponent } = this.builder;
    return exponent === 3 ? Math.cbrt(ratio) : Math.exp(Math.log(ratio) / exponent);
  }
}
