import type { StateIn, StateOut } from '../core/state.ts';
import { straighten } from '../moves/straighten.ts';
import type { Room } from '../room/room.ts';
import type { ForestBuilder } from '../tree/builder.ts';
import { evict } from './evict.ts';
import type { GrowingForest } from './growing-forest.ts';
import { mendByMoving } from './mend.ts';

/** Tries that one vessel gets, each of them evicting another that is in its way. */
const MOST_TRIES = 8;

/** Makes vessels fit whose radii have outgrown what they were certified for: as they stand, by moving a node, or by evicting. */
export class Settler {
  /** Vessels that were made to fit by moving a node. */
  mended = 0;
  private readonly forest: GrowingForest;
  private readonly builder: ForestBuilder;
  private readonly room: Room;
  private readonly headroom: number;

  /** @param headroom radius certified over radius needed */
  constructor(forest: GrowingForest, headroom: number) {
    this.forest = forest;
    this.builder = forest.builder;
    this.room = forest.room;
    this.headroom = headroom;
  }

  /**
   * Certifies every vessel that has outgrown its reserve and evicts what does not fit.
   *
   * @param again whether evicted sites are given back to be tried again; else they are given up
   * @returns number of terminals evicted
   */
  settleAll(again: boolean): number {
    let evicted = 0;
    for (const tree of this.forest.trees) if (tree.demand.served > 0) evicted += this.settleTree(tree.rows(), again);
    return evicted;
  }

  /** @param order the tree's rows, parents first */
  private settleTree(order: Int32Array, again: boolean): number {
    const { builder, room } = this;
    let evicted = 0;
    for (let k = 1; k < order.length; k++) {
      const row = order[k]!;
      // An eviction further up may have taken the row, or given it to another place.
      for (let tries = 0; tries < MOST_TRIES && builder.parent[row]! >= 0 && room.outgrown(row); tries++) {
        if (this.settle(row)) break;
        if (mendByMoving(builder, room, row, this.headroom)) {
          this.mended++;
          break;
        }
        this.settle(row);
        let gone = 0;
        evict(builder, room, this.lightest(row), (terminal) => {
          gone++;
          this.giveUp(terminal, again);
        });
        if (gone === 0) break;
        evicted += gone;
      }
    }
    return evicted;
  }

  /** Takes a terminal that is evicted off the books of the tree that it hung on. */
  private giveUp(terminal: number, again: boolean): void {
    const { trees, sites } = this.forest;
    const { demand } = trees[this.builder.tree[terminal]!]!;
    if (again) demand.giveBack(sites.of(terminal), true);
    else demand.served--;
    sites.forget(terminal);
  }

  /** Certifies one vessel where it stands, if it and its ends fit. */
  settle(row: number): boolean {
    const { room, builder } = this;
    room.begin();
    if (!room.certify(row, this.headroom)) return false;
    if (!room.fits(row) || !room.fits(builder.parent[row]!)) return false;
    room.commit();
    return true;
  }

  /** Vessels that do not fit with their present radii, which only a stub can still be once growth is finished. */
  misfits(): number[] {
    const { builder, room } = this;
    const rows: number[] = [];
    for (let row = 0; row < builder.count; row++) {
      if (builder.parent[row]! >= 0 && room.outgrown(row) && !this.settle(row)) rows.push(row);
    }
    return rows;
  }

  /** Straightens the bends that evictions have left, where the straight vessel fits. */
  straightenAll(): void {
    const { builder, room } = this;
    for (const tree of this.forest.trees) {
      if (tree.demand.served === 0) continue;
      for (const row of tree.rows()) {
        if (builder.parent[row]! >= 0 && builder.childCount(row) === 1) straighten(builder, room, row);
      }
    }
  }

  save(out: StateOut): void {
    out.list('mended', 'f64', [this.mended]);
  }

  restore(from: StateIn): void {
    this.mended = from.reals('mended')[0]!;
  }

  /** The least vessel whose going could make room for a refused row: itself, what blocks it, or a side branch near by. */
  private lightest(row: number): number {
    const { room, builder } = this;
    const { blocker } = room;
    if (room.refusal === 'vessel') return builder.load[blocker]! < builder.load[row]! ? blocker : row;
    if (room.refusal !== 'junction') return row;
    let best = -1;
    const consider = (node: number) => {
      const b = node < 0 ? -1 : builder.child[2 * node + 1]!;
      if (b < 0) return;
      const a = builder.child[2 * node]!;
      const lesser = builder.load[a]! <= builder.load[b]! ? a : b;
      if (best < 0 || builder.load[lesser]! < builder.load[best]!) best = lesser;
    };
    // A tube is too short for the balls at its ends, or an angle too small: a side branch at either end makes them so.
    consider(blocker);
    consider(builder.parent[blocker]!);
    for (let k = 0; k < 2; k++) consider(builder.child[2 * blocker + k]!);
    if (best < 0) return row;
    return builder.load[best]! <= builder.load[row]! ? best : row;
  }
}
