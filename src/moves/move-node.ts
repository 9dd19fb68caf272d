import { fermatPoint } from '../physics/fermat.ts';
import type { Room } from '../room/room.ts';
import type { ForestBuilder } from '../tree/builder.ts';
import { span } from './span.ts';
import { straighten } from './straighten.ts';

/** Shares of the way to its best place that a node tries. */
const STEPS = [1, 0.5, 0.2] as const;

/** Share of the way, and what is gone to the side for each part of it. */
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

/**
 * Moves nodes to where their tubes cost least, as far as there is room.
 *
 * With radii fixed a tube costs w·L, so a junction's best place is the weighted Fermat point of its neighbours. A move is
 * made only if it lowers the cost and everything it touches still fits: the forest is feasible after every move.
 */
export class NodeMover {
  private readonly builder: ForestBuilder;
  private readonly room: Room;
  private readonly target = new Float64Array(3);
  private readonly steps: readonly number[];
  private readonly aside: boolean;
  private readonly home = new Float64Array(3);
  private readonly side = new Float64Array(3 * 6 * SLANTS.length);
  private readonly found = new Float64Array(6 * SLANTS.length);

  /** @param aside whether nodes that something blocks try to slip past it: better places, for several times the work */
  constructor(builder: ForestBuilder, room: Room, steps: readonly number[] = STEPS, aside = false) {
    this.aside = aside;
    this.builder = builder;
    this.room = room;
    this.steps = steps;
  }

  /**
   * Moves one junction or bend; roots, stubs and terminals stay.
   *
   * @param weight (rows) cost per length of each tube
   * @param least  share of its tubes' cost below which a gain is not worth a look, ≥ 0
   * @returns true if it has moved, or a bend has gone
   */
  move(row: number, weight: Float64Array, least: number): boolean {
    const { builder, room } = this;
    if (builder.parent[row]! < 0 || room.pinned.has(row)) return false;
    const a = builder.child[2 * row]!;
    if (a < 0) return false;
    const b = builder.child[2 * row + 1]!;
    if (b >= 0) return this.moveJunction(row, a, b, weight, least);
    return straighten(builder, room, row) || this.moveBend(row, a, least);
  }

  private moveJunction(row: number, a: number, b: number, weight: Float64Array, least: number): boolean {
    const { builder, target } = this;
    const p = builder.position;
    const top = builder.parent[row]!;
    const wt = weight[row]!;
    const wa = weight[a]!;
    const wb = weight[b]!;
    fermatPoint(
      p[3 * top]!,
      p[3 * top + 1]!,
      p[3 * top + 2]!,
      p[3 * a]!,
      p[3 * a + 1]!,
      p[3 * a + 2]!,
      p[3 * b]!,
      p[3 * b + 1]!,
      p[3 * b + 2]!,
      wt,
      wa,
      wb,
      target,
    );
    return this.tryWay(row, top, a, b, wt, wa, wb, least);
  }

  /** Draws a bend towards the straight line between its neighbours. */
  private moveBend(row: number, a: number, least: number): boolean {
    const { target } = this;
    const p = this.builder.position;
    const top = this.builder.parent[row]!;
    const x = p[3 * top]!;
    const y = p[3 * top + 1]!;
    const z = p[3 * top + 2]!;
    const ux = p[3 * a]! - x;
    const uy = p[3 * a + 1]! - y;
    const uz = p[3 * a + 2]! - z;
    const t =
      ((p[3 * row]! - x) * ux + (p[3 * row + 1]! - y) * uy + (p[3 * row + 2]! - z) * uz) /
      (ux * ux + uy * uy + uz * uz);
    if (!(t > 0 && t < 1)) return false;
    target[0] = x + t * ux;
    target[1] = y + t * uy;
    target[2] = z + t * uz;
    return this.tryWay(row, top, a, -1, 1, 1, 0, least);
  }

  /** Goes as far towards `target` as is cheaper and fits. */
  private tryWay(
    row: number,
    top: number,
    a: number,
    b: number,
    wt: number,
    wa: number,
    wb: number,
    least: number,
  ): boolean {
    const { builder, target } = this;
    const p = builder.position;
    const x = p[3 * row]!;
    const y = p[3 * row + 1]!;
    const z = p[3 * row + 2]!;
    this.home[0] = x;
    this.home[1] = y;
    this.home[2] = z;
    const before = this.costAt(x, y, z, top, a, b, wt, wa, wb);
    const best = this.costAt(target[0]!, target[1]!, target[2]!, top, a, b, wt, wa, wb);
    if (!(before - best > least * before)) return false;
    for (const step of this.steps) {
      const nx = x + step * (target[0]! - x);
      const ny = y + step * (target[1]! - y);
      const nz = z + step * (target[2]! - z);
      // The cost is convex, so part of the way is cheaper too, but for rounding.
      if (!(this.costAt(nx, ny, nz, top, a, b, wt, wa, wb) < before * (1 - 1e-12))) continue;
      if (this.place(row, top, a, b, nx, ny, nz)) return true;
    }
    if (this.aside && this.trySides(row, top, a, b, wt, wa, wb, before * (1 - Math.max(least, 1e-6)))) return true;
    p[3 * row] = x;
    p[3 * row + 1] = y;
    p[3 * row + 2] = z;
    return false;
  }

  /**
   * Something stands in the straight way: tries to slip past it, half way and less, at slants all round. The place that is
   * cheapest goes first.
   */
  private trySides(
    row: number,
    top: number,
    a: number,
    b: number,
    wt: number,
    wa: number,
    wb: number,
    below: number,
  ): boolean {
    const { builder, target, side, found } = this;
    const p = builder.position;
    const x = this.home[0]!;
    const y = this.home[1]!;
    const z = this.home[2]!;
    const ux = target[0]! - x;
    const uy = target[1]! - y;
    const uz = target[2]! - z;
    const far = Math.sqrt(ux * ux + uy * uy + uz * uz);
    // Two directions square to the way: from the axis that it runs along least.
    const flat =
      Math.abs(ux) <= Math.abs(uy) && Math.abs(ux) <= Math.abs(uz) ? 0 : Math.abs(uy) <= Math.abs(uz) ? 1 : 2;
    const ex = flat === 0 ? 1 : 0;
    const ey = flat === 1 ? 1 : 0;
    const ez = flat === 2 ? 1 : 0;
    let vx = uy * ez - uz * ey;
    let vy = uz * ex - ux * ez;
    let vz = ux * ey - uy * ex;
    const v = far / Math.sqrt(vx * vx + vy * vy + vz * vz);
    vx *= v;
    vy *= v;
    vz *= v;
    const wx = (uy * vz - uz * vy) / far;
    const wy = (uz * vx - ux * vz) / far;
    const wz = (ux * vy - uy * vx) / far;
    let count = 0;
    for (const [step, slope] of SLANTS) {
      for (let k = 0; k < 6; k++) {
        const c = slope * COSINES[k]!;
        const s = slope * SINES[k]!;
        const nx = x + step * (ux + c * vx + s * wx);
        const ny = y + step * (uy + c * vy + s * wy);
        const nz = z + step * (uz + c * vz + s * wz);
        const cost = this.costAt(nx, ny, nz, top, a, b, wt, wa, wb);
        if (!(cost < below)) continue;
        let at = count++;
        for (; at > 0 && found[at - 1]! > cost; at--) {
          found[at] = found[at - 1]!;
          side.copyWithin(3 * at, 3 * at - 3, 3 * at);
        }
        found[at] = cost;
        side[3 * at] = nx;
        side[3 * at + 1] = ny;
        side[3 * at + 2] = nz;
      }
    }
    for (let k = 0; k < count; k++) {
      if (this.place(row, top, a, b, side[3 * k]!, side[3 * k + 1]!, side[3 * k + 2]!)) return true;
    }
    p[3 * row] = x;
    p[3 * row + 1] = y;
    p[3 * row + 2] = z;
    return false;
  }

  /** Moves a node there and looks whether all that it touches fits; the caller puts it back if not. */
  private place(row: number, top: number, a: number, b: number, x: number, y: number, z: number): boolean {
    const { builder, room } = this;
    const p = builder.position;
    p[3 * row] = x;
    p[3 * row + 1] = y;
    p[3 * row + 2] = z;
    room.begin();
    room.move(row);
    room.move(a);
    if (b >= 0) room.move(b);
    if (
      room.fits(row) &&
      room.fits(top) &&
      room.fits(a) &&
      (b < 0 || room.fits(b)) &&
      room.certify(row, 1) &&
      room.certify(a, 1) &&
      (b < 0 || room.certify(b, 1))
    ) {
      room.commit();
      return true;
    }
    return false;
  }

  private costAt(
    x: number,
    y: number,
    z: number,
    top: number,
    a: number,
    b: number,
    wt: number,
    wa: number,
    wb: number,
  ): number {
    const p = this.builder.position;
    let cost = wt * span(x - p[3 * top]!, y - p[3 * top + 1]!, z - p[3 * top + 2]!);
    cost += wa * span(x - p[3 * a]!, y - p[3 * a + 1]!, z - p[3 * a + 2]!);
    if (b >= 0) cost += wb * span(x - p[3 * b]!, y - p[3 * b + 1]!, z - p[3 * b + 2]!);
    return cost;
  }
}
