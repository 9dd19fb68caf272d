import type { Memory } from '../core/memory.ts';
import { NodeMover } from '../moves/move-node.ts';
import type { NodeLook, TubeWeight } from '../moves/node-look.ts';
import { flowWeight } from '../physics/murray.ts';
import type { Room } from '../room/room.ts';
import type { ForestBuilder } from '../tree/builder.ts';

/*
 * Lab notes (ellipsoid, γ = 3, about 5 % vessel volume, December 2026):
 * - No sweeps while the tree grows: Σ Q^(2/3) L over the cube root of the volume is 4.89 at 10,000 terminals, 4.54 after
 *   relaxation of the finished tree. A sweep at each tenth of growth: 4.44 and 4.27. A trunk's junctions were placed for
 *   the few terminals of their time, and it is their zigzag that later vessels grow round.
 * - Sweeps without slack pack tubes so tightly that none can gain flow: growth stuck at 22 of 10,000 terminals.
 * - Moved tubes taken 1.2, all others 1.05 of today's radius wide: 4.47 at 50,000, 1.33 tries a terminal; both 1.2: 4.54
 *   and 1.2 tries; both 1.1: 4.48 and 1.55 tries.
 * - Sweeps at each 15 % of growth cost a third of the time that growth takes; at each 10 %, a half, for 1 % less cost.
 */

/** Radii over today's that a moved node leaves room for, so that the tubes at it can still gain flow. */
const SLACK = 1.2;
/** Gain, as a share of the cost of its tubes, for which a node is moved. */
const GAIN = 1e-3;
/** Nodes looked at before the first of them is moved. */
const BATCH = 16_384;

/** Nodes that are looked at together, and what was found for each. */
export interface MoveColumns {
  readonly count: number;
  /** (count) nodes. */
  readonly node: Int32Array;
  /** (count) 1 where a better place was found, (count, 3) m, the place. */
  readonly better: Int32Array;
  readonly place: Float64Array;
}

/** Looks for better places for the nodes from … end − 1 of a batch, each tube weighed as if it had its least-power radius. */
export function lookAll(look: NodeLook, builder: ForestBuilder, moves: MoveColumns, from: number, end: number): void {
  const weight: TubeWeight = (row) => flowWeight(builder.load[row]!);
  for (let k = from; k < end; k++) {
    const found = look.look(moves.node[k]!, weight, GAIN);
    moves.better[k] = found ? 1 : 0;
    if (!found) continue;
    for (let i = 0; i < 3; i++) moves.place[3 * k + i] = look.place[i]!;
  }
}

/** The look that a crew's members take. */
export const LOOK_SLACK = SLACK;

/** Sweeps over a growing forest that move each node to a better place; looks are taken in batches, moves one by one. */
export class Relaxer {
  readonly mover: NodeMover;
  private readonly builder: ForestBuilder;
  private readonly node: Int32Array;
  private readonly better: Int32Array;
  private readonly place: Float64Array;

  constructor(builder: ForestBuilder, room: Room, memory: Memory) {
    this.builder = builder;
    this.mover = new NodeMover(builder, room, SLACK);
    this.node = new Int32Array(memory(4 * BATCH));
    this.better = new Int32Array(memory(4 * BATCH));
    this.place = new Float64Array(memory(24 * BATCH));
  }

  /**
   * Moves every node once that gains by it.
   *
   * @param look has all nodes of a batch looked at, by whoever helps
   */
  sweep(look: (moves: MoveColumns) => void): void {
    const { builder, mover, node, better, place } = this;
    const weight: TubeWeight = (row) => flowWeight(builder.load[row]!);
    let row = 0;
    while (row < builder.count) {
      let count = 0;
      for (; row < builder.count && count < BATCH; row++) {
        if (builder.parent[row]! < 0 || builder.child[2 * row]! < 0) continue;
        if (!mover.straightens(row)) node[count++] = row;
      }
      look({ count, node, better, place });
      for (let k = 0; k < count; k++) {
        if (better[k] === 0) continue;
        const [x, y, z] = [place[3 * k]!, place[3 * k + 1]!, place[3 * k + 2]!];
        // What was found holds for neighbours that have not moved since.
        if (mover.look.gains(node[k]!, weight, x, y, z)) mover.put(node[k]!, x, y, z);
      }
    }
  }
}
