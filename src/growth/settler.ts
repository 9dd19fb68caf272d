import { straighten } from '../moves/straighten.ts';
import type { Room } from '../room/room.ts';
import type { ForestBuilder } from '../tree/builder.ts';
import { evict } from './evict.ts';
import { mendByMoving } from './mend.ts';

/** Tries that one vessel gets, each of them evicting another that is in its way. */
const MOST_TRIES = 8;

/** Makes vessels fit whose radii have outgrown what they were certified for: as they stand, by moving a node, or by evicting. */
export class Settler {
  /** Vessels that were made to fit by moving a node. */
  mended = 0;
  private readonly builder: ForestBuilder;
  private readonly room: Room;
  private readonly headroom: number;

  /** @param headroom radius certified over radius needed */
  constructor(builder: ForestBuilder, room: Room, headroom: number) {
    this.builder = builder;
    this.room = room;
    this.headroom = headroom;
  }

  /**
   * Certifies every vessel of a tree that has outgrown its reserve and evicts what does not fit.
   *
   * @param order     the tree's rows, parents first
   * @param onEvicted told each terminal that goes
   * @returns number of terminals evicted
   */
  settleAll(order: Int32Array, onEvicted: (terminal: number) => void): number {
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
          onEvicted(terminal);
        });
        if (gone === 0) break;
        evicted += gone;
      }
    }
    return evicted;
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

  /** Straightens the bends of a tree that evictions have left, where the straight vessel fits. */
  straightenAll(order: Int32Array): void {
    const { builder, room } = this;
    for (const row of order) {
      if (builder.parent[row]! >= 0 && builder.childCount(row) === 1) straighten(builder, room, row);
    }
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
