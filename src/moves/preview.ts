import { boxesApart, squaredDistanceBetweenSegments } from '../core/segments.ts';
import { FIT_MARGIN, RUN_OUT, separationReach } from '../room/reach.ts';
import type { Room } from '../room/room.ts';
import { tubeInside } from '../tissue/tube.ts';
import type { ForestBuilder } from '../tree/builder.ts';

/** Lengths are asked a hair less than they must be: the last word has whoever makes the change. */
export const LENIENT = 1 - 1e-6;

/**
 * Looks at a change before it is made, and changes nothing: what it refuses would not fit; what it lets through most
 * likely does. So many looks may be taken at one forest at once.
 */
export class Preview {
  /** Row whose tube does not count: that of a subtree which has been cut; −1: none. */
  ignored = -1;
  /** What the change leaves of the radius of a tube that it does not touch, ≤ 1. */
  shrink = 1;
  private readonly builder: ForestBuilder;
  private readonly room: Room;

  constructor(builder: ForestBuilder, room: Room) {
    this.builder = builder;
    this.room = room;
  }

  /**
   * Whether a tube a→b would stay clear of every tube as wide as it is today, but those that meet a node it shares.
   *
   * @param radius m, of the new tube
   * @param skip   a row whose own tube does not count (−1 for none): the tube that is to be replaced
   * @param nodeA, nodeB nodes that the new tube ends at (−1 for a new one): tubes that meet them do not count
   */
  clear(
    ax: number,
    ay: number,
    az: number,
    bx: number,
    by: number,
    bz: number,
    radius: number,
    skip: number,
    nodeA: number,
    nodeB: number,
  ): boolean {
    const { builder, room } = this;
    const p = builder.position;
    const need = radius + room.limits.gap;
    const near = room.nearTube(ax, ay, az, bx, by, bz, need);
    for (let k = 0; k < near; k++) {
      const other = room.foundRow(k);
      const top = builder.parent[other]!;
      if (top < 0 || other === skip || other === this.ignored) continue;
      if (nodeA >= 0 && (other === nodeA || top === nodeA)) continue;
      if (nodeB >= 0 && (other === nodeB || top === nodeB)) continue;
      const cx = p[3 * top]!;
      const cy = p[3 * top + 1]!;
      const cz = p[3 * top + 2]!;
      const dx = p[3 * other]!;
      const dy = p[3 * other + 1]!;
      const dz = p[3 * other + 2]!;
      const wide = need + room.reserveOf(other);
      if (boxesApart(ax, ay, az, bx, by, bz, cx, cy, cz, dx, dy, dz, wide)) continue;
      const squared = squaredDistanceBetweenSegments(ax, ay, az, bx, by, bz, cx, cy, cz, dx, dy, dz);
      if (squared >= wide * wide) continue;
      const least = need + this.shrink * builder.radius(other);
      if (squared < least * least) return false;
    }
    return true;
  }

  /** Whether a tube of a radius (m) would lie in the tissue. */
  inside(ax: number, ay: number, az: number, bx: number, by: number, bz: number, radius: number): boolean {
    return tubeInside(this.room.tissue, ax, ay, az, bx, by, bz, radius);
  }

  /**
   * Radius (m) of the ball around a node if the tube between it and one neighbour led to another place, or −1 where an
   * angle would be too small.
   *
   * The geometry is that of `Room.ball`, written again: one function for both, given the radii, made growth 3 to 4 %
   * slower (20,000 terminals, 5 %; least of six runs in turn 203 → 212 µs a terminal, median 210 → 217).
   *
   * @param neighbour the parent or child that is replaced; −1: none
   * @param x, y, z   m, where its end would be
   * @param radius    m, of its tube then
   */
  ballWith(node: number, neighbour: number, x: number, y: number, z: number, radius: number): number {
    const { builder, room } = this;
    const c0 = builder.child[2 * node]!;
    const c1 = builder.child[2 * node + 1]!;
    const parent = builder.parent[node]!;
    if (parent < 0) return RUN_OUT * (c0 === neighbour ? radius : this.shrink * builder.radius(c0));
    const own = parent === neighbour ? radius : this.shrink * builder.radius(node);
    if (c0 < 0) return RUN_OUT * own;
    const p = builder.position;
    const ox = p[3 * node]!;
    const oy = p[3 * node + 1]!;
    const oz = p[3 * node + 2]!;
    const pr = parent === neighbour;
    let px = (pr ? x : p[3 * parent]!) - ox;
    let py = (pr ? y : p[3 * parent + 1]!) - oy;
    let pz = (pr ? z : p[3 * parent + 2]!) - oz;
    let inverse = 1 / Math.sqrt(px * px + py * py + pz * pz);
    px *= inverse;
    py *= inverse;
    pz *= inverse;
    const ar = c0 === neighbour;
    let ax = (ar ? x : p[3 * c0]!) - ox;
    let ay = (ar ? y : p[3 * c0 + 1]!) - oy;
    let az = (ar ? z : p[3 * c0 + 2]!) - oz;
    inverse = 1 / Math.sqrt(ax * ax + ay * ay + az * az);
    ax *= inverse;
    ay *= inverse;
    az *= inverse;
    const ra = ar ? radius : this.shrink * builder.radius(c0);
    const pa = px * ax + py * ay + pz * az;
    if (c1 < 0) return pa <= room.limits.cosMinBend ? separationReach(own, ra, pa) : -1;
    const br = c1 === neighbour;
    let bx = (br ? x : p[3 * c1]!) - ox;
    let by = (br ? y : p[3 * c1 + 1]!) - oy;
    let bz = (br ? z : p[3 * c1 + 2]!) - oz;
    inverse = 1 / Math.sqrt(bx * bx + by * by + bz * bz);
    bx *= inverse;
    by *= inverse;
    bz *= inverse;
    const rb = br ? radius : this.shrink * builder.radius(c1);
    const pb = px * bx + py * by + pz * bz;
    const ab = ax * bx + ay * by + az * bz;
    const least = room.limits.cosMinAngle;
    if (!(pa <= least && pb <= least && ab <= least)) return -1;
    return Math.max(separationReach(own, ra, pa), separationReach(own, rb, pb), separationReach(ra, rb, ab));
  }

  /** Whether the tubes at a node other than the one to `neighbour` are long enough for a ball (m) there. */
  sparesOthers(node: number, neighbour: number, ball: number): boolean {
    const { builder } = this;
    const parent = builder.parent[node]!;
    if (parent >= 0 && parent !== neighbour && !this.longEnough(node, parent, ball)) return false;
    for (let k = 0; k < 2; k++) {
      const child = builder.child[2 * node + k]!;
      if (child >= 0 && child !== neighbour && !this.longEnough(node, child, ball)) return false;
    }
    return true;
  }

  private longEnough(node: number, other: number, ball: number): boolean {
    const p = this.builder.position;
    const dx = p[3 * other]! - p[3 * node]!;
    const dy = p[3 * other + 1]! - p[3 * node + 1]!;
    const dz = p[3 * other + 2]! - p[3 * node + 2]!;
    const far = this.ballWith(other, -1, 0, 0, 0, 0);
    const least = LENIENT * FIT_MARGIN * (ball + (far < 0 ? 0 : far));
    return dx * dx + dy * dy + dz * dz >= least * least;
  }
}
