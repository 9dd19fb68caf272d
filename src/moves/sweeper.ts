import { ownMemory } from '../core/memory.ts';
import type { Room } from '../room/room.ts';
import type { ForestBuilder } from '../tree/builder.ts';
import { type Crew, workTogether } from './crew.ts';
import { lookAll, type MoveColumns, weigherOf } from './look-all.ts';
import { NodeMover } from './move-node.ts';

/*
 * Lab notes (ellipsoid, γ = 3, about 5 % vessel volume, December 2026):
 * - No sweeps while the tree grows: Σ Q^(2/3) L over the cube root of the volume is 4.89 at 10,000 terminals, 4.54 after
 *   relaxation of the finished tree. A sweep at each tenth of growth: 4.44 and 4.27. A trunk's junctions were placed for
 *   the few terminals of their time, and it is their zigzag that later vessels grow round.
 * - Sweeps without slack pack tubes so tightly that none can gain flow: growth stuck at 22 of 10,000 terminals.
 * - Moved tubes taken 1.2, all others 1.05 of today's radius wide: 4.47 at 50,000, 1.33 tries a terminal; both 1.2: 4.54
 *   and 1.2 tries; both 1.1: 4.48 and 1.55 tries.
 * - Sweeps at each 15 % of growth take two fifths of growth's time; at each 30 %, a quarter, and after refinement the trees
 *   cost the same.
 * - Nodes that carry two or three terminals, half of all, left out of growth's sweeps (60,000 terminals): growth 14.8 →
 *   10.7 s, 4.497 → 4.501 after quick refinement, in the same time. Two to six left out: 9.5 s, 4.507.
 * - Half of a sweep's time goes to looks, half to putting nodes where they were found to fit better.
 */

/** Nodes looked at before the first of them is moved. */
const BATCH = 16_384;
/** Rows below which nodes are moved as soon as they are looked at, which needs fewer sweeps. */
const FEW_ROWS = 40_000;

/** Sweeps over a forest that move each node to a better place; looks are taken in batches, by a crew, moves one by one. */
export class Sweeper {
  private readonly mover: NodeMover;
  private readonly builder: ForestBuilder;
  private readonly room: Room;
  private readonly crew: Crew | null;
  private readonly slack: number;
  /** Share of the cost of its tubes for which a node is moved, ≥ 0. */
  gain: number;
  private readonly node: Int32Array;
  private readonly better: Int32Array;
  private readonly place: Float64Array;

  /**
   * @param slack radii that a moved node leaves room for over today's, ≥ 1
   * @param gain  share of the cost of its tubes for which a node is moved, ≥ 0
   */
  constructor(builder: ForestBuilder, room: Room, crew: Crew | null, slack: number, gain: number) {
    this.builder = builder;
    this.room = room;
    this.crew = crew;
    this.slack = slack;
    this.gain = gain;
    this.mover = new NodeMover(builder, room, slack);
    const memory = crew?.memory ?? ownMemory;
    this.node = new Int32Array(memory(4 * BATCH));
    this.better = new Int32Array(memory(4 * BATCH));
    this.place = new Float64Array(memory(24 * BATCH));
  }

  /**
   * Moves every node once that gains by it.
   *
   * @param weight (rows) cost per length of each tube, in the crew's memory; null: as if it had its least-power radius
   * @param least  terminals below a node for which it is looked at
   */
  sweep(weight: Float64Array | null, least = 1): void {
    const { builder, room, mover, node, better, place, slack, gain } = this;
    const weigh = weigherOf(builder, weight);
    if (builder.count < FEW_ROWS) {
      for (let row = 0; row < builder.count; row++) if (carries(builder, row, least)) mover.move(row, weigh, gain);
      return;
    }
    let row = 0;
    while (row < builder.count) {
      let count = 0;
      for (; row < builder.count && count < BATCH; row++) {
        if (builder.parent[row]! < 0 || builder.child[2 * row]! < 0 || !carries(builder, row, least)) continue;
        if (!mover.straightens(row)) node[count++] = row;
      }
      const moves: MoveColumns = { count, node, better, place, slack, gain, weight };
      workTogether(this.crew, builder, room, { moves }, count, (from, end) =>
        lookAll(mover.look, builder, moves, from, end),
      );
      for (let k = 0; k < count; k++) {
        if (better[k] === 0) continue;
        const [x, y, z] = [place[3 * k]!, place[3 * k + 1]!, place[3 * k + 2]!];
        // What was found holds for neighbours that have not moved since.
        if (mover.look.gains(node[k]!, weigh, x, y, z)) mover.put(node[k]!, x, y, z);
      }
    }
  }
}

/** Whether so many terminals hang on a node, itself included. */
function carries(builder: ForestBuilder, row: number, least: number): boolean {
  return least <= 1 || terminalsBelow(builder, row, least) >= least;
}

/** Terminals below a node, counted up to `enough`. */
function terminalsBelow(builder: ForestBuilder, row: number, enough: number): number {
  const a = builder.child[2 * row]!;
  if (a < 0) return 1;
  let found = terminalsBelow(builder, a, enough);
  const b = builder.child[2 * row + 1]!;
  if (b >= 0 && found < enough) found += terminalsBelow(builder, b, enough - found);
  return found;
}
