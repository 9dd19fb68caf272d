import type { Room } from '../room/room.ts';
import type { ForestBuilder } from '../tree/builder.ts';
import { leastPowerPerLength, type PerLength } from './per-length.ts';
import { Trial } from './trial.ts';

/*
 * Notation: J above S and K above T, two subtrees with flows q and t that lie in no line; exchanged, J carries T and K
 * carries S, and the junctions stay where they are. Every tube from J up to where the two ways meet gains t − q, every
 * one from K up loses it; beyond, nothing changes. The sum is exact.
 */

/*
 * Lab notes: after subtrees were hung where they cost least, exchanges gain next to nothing (50,000 terminals: less than
 * 0.01 %; 10,000 hair-thin: nothing in 2 s), so refinement tries them in one round of four.
 */

/** Subtrees near by that one is compared with. */
const MOST_NEAR = 24;

/** Lets two subtrees change places where that costs less and there is room for it. */
export class Exchanger {
  private readonly builder: ForestBuilder;
  private readonly room: Room;
  private readonly perLength: PerLength;
  private readonly losing: Trial;
  private readonly gaining: Trial;

  constructor(builder: ForestBuilder, room: Room, perLength: PerLength = leastPowerPerLength) {
    this.builder = builder;
    this.room = room;
    this.perLength = perLength;
    this.losing = new Trial(builder, room, 1);
    this.gaining = new Trial(builder, room, 1);
  }

  /**
   * Exchanges the subtree that starts with a row's tube for the one near by that gains most.
   *
   * @param least share of the two tubes' cost below which a gain is not worth the change, ≥ 0
   * @returns     what was saved, in the unit of `perLength`; 0 where the forest is as before
   */
  exchange(top: number, least: number): number {
    const { builder, room } = this;
    if (!this.mayGo(top)) return 0;
    const p = builder.position;
    const junction = builder.parent[top]!;
    const length = this.distance(junction, top);
    const near = Math.min(
      room.near(p[3 * top]!, p[3 * top + 1]!, p[3 * top + 2]!, 0.7 * length),
      // Where it is crowded the first will do: what is found is in a fixed order.
      16 * MOST_NEAR,
    );
    const load = builder.load[top]!;
    let best = -1;
    let most = 0;
    let looked = 0;
    for (let k = 0; k < near && looked < MOST_NEAR; k++) {
      const other = room.foundRow(k);
      if (other === top || builder.tree[other] !== builder.tree[top] || !this.mayGo(other)) continue;
      const theirs = builder.load[other]!;
      if (theirs > 4 * load || load > 4 * theirs) continue;
      const apart = builder.parent[other]!;
      if (apart === junction || this.builder.isBelow(other, top) || this.builder.isBelow(top, other)) continue;
      looked++;
      const gain = this.gainOf(top, other);
      if (gain > most) {
        most = gain;
        best = other;
      }
    }
    if (best < 0) return 0;
    const tree = builder.tree[top]!;
    const cost =
      this.perLength(load, tree) * length +
      this.perLength(builder.load[best]!, tree) * this.distance(builder.parent[best]!, best);
    if (!(most > least * cost) || !this.tryExchange(top, best)) return 0;
    return most;
  }

  /** A subtree may go where a junction holds it, and neither is a stub or a bend. */
  private mayGo(top: number): boolean {
    const { builder, room } = this;
    const junction = builder.parent[top]!;
    if (junction < 0 || builder.childCount(junction) !== 2 || builder.childCount(top) === 1) return false;
    return builder.parent[junction]! >= 0 && !room.pinned.has(top) && !room.pinned.has(junction);
  }

  private gainOf(top: number, other: number): number {
    const { builder, perLength } = this;
    const tree = builder.tree[top]!;
    const j = builder.parent[top]!;
    const k = builder.parent[other]!;
    const q = builder.load[top]!;
    const t = builder.load[other]!;
    let gain =
      perLength(q, tree) * (this.distance(j, top) - this.distance(k, top)) +
      perLength(t, tree) * (this.distance(k, other) - this.distance(j, other));
    if (q !== t) gain -= this.wayChange(j, k, t - q) + this.wayChange(k, j, q - t);
    return gain;
  }

  /** Change of cost from a node up to where its way meets that of another, if its tubes carry `more`. */
  private wayChange(from: number, meets: number, more: number): number {
    const { builder, perLength } = this;
    const tree = builder.tree[from]!;
    let sum = 0;
    for (let at = from; builder.parent[at]! >= 0 && !this.builder.isBelow(meets, at); at = builder.parent[at]!) {
      const load = builder.load[at]!;
      sum += (perLength(load + more, tree) - perLength(load, tree)) * this.distance(builder.parent[at]!, at);
    }
    return sum;
  }

  private tryExchange(top: number, other: number): boolean {
    const { builder, room, losing, gaining } = this;
    const j = builder.parent[top]!;
    const k = builder.parent[other]!;
    const q = builder.load[top]!;
    const t = builder.load[other]!;
    const v = builder.weight[top]!;
    const w = builder.weight[other]!;
    builder.replaceChild(j, top, other);
    builder.replaceChild(k, other, top);
    builder.parent[top] = k;
    builder.parent[other] = j;
    // The whole keeps its weight: beyond the meeting of the two ways the changes cancel.
    losing.raise(j, t - q, w - v);
    gaining.raise(k, q - t, v - w);
    if (this.fits(top, other, j, k)) {
      room.commit();
      return true;
    }
    gaining.lower();
    losing.lower();
    builder.replaceChild(j, other, top);
    builder.replaceChild(k, top, other);
    builder.parent[top] = j;
    builder.parent[other] = k;
    return false;
  }

  private fits(top: number, other: number, j: number, k: number): boolean {
    const { builder, room } = this;
    room.begin();
    room.move(top);
    room.move(other);
    const ends = [j, k, top, other];
    for (const node of ends) if (!room.fits(node)) return false;
    if (!room.certify(top, 1) || !room.certify(other, 1)) return false;
    for (const from of [j, k]) {
      for (let at = from; builder.parent[at]! >= 0; at = builder.parent[at]!) {
        if (!room.outgrown(at)) continue;
        if (!room.certify(at, 1) || !room.fits(at) || !room.fits(builder.parent[at]!)) return false;
      }
    }
    for (const node of ends) if (!room.fits(node)) return false;
    return true;
  }

  private distance(a: number, b: number): number {
    const p = this.builder.position;
    const dx = p[3 * a]! - p[3 * b]!;
    const dy = p[3 * a + 1]! - p[3 * b + 1]!;
    const dz = p[3 * a + 2]! - p[3 * b + 2]!;
    return Math.sqrt(dx * dx + dy * dy + dz * dz);
  }
}
