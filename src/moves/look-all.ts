import { flowWeight } from '../physics/murray.ts';
import type { ForestBuilder } from '../tree/builder.ts';
import type { NodeLook, TubeWeight } from './node-look.ts';

/** Nodes that are looked at together, and what was found for each. */
export interface MoveColumns {
  readonly count: number;
  /** (count) nodes. */
  readonly node: Int32Array;
  /** (count) 1 where a better place was found, (count, 3) m, the place. */
  readonly better: Int32Array;
  readonly place: Float64Array;
  /** Radii that a moved node leaves room for over today's, so that the tubes at it can still gain flow. */
  readonly slack: number;
  /** Gain, as a share of the cost of its tubes, for which a node is moved. */
  readonly gain: number;
  /** (rows) cost per length of each tube; null: as if it had its least-power radius. */
  readonly weight: Float64Array | null;
}

/** Looks for better places for the nodes from … end − 1 of a batch. */
export function lookAll(look: NodeLook, builder: ForestBuilder, moves: MoveColumns, from: number, end: number): void {
  const weigh = weigherOf(builder, moves.weight);
  for (let k = from; k < end; k++) {
    const found = look.look(moves.node[k]!, weigh, moves.gain);
    moves.better[k] = found ? 1 : 0;
    if (!found) continue;
    for (let i = 0; i < 3; i++) moves.place[3 * k + i] = look.place[i]!;
  }
}

/** Cost per length of a tube, from a column or, without one, as if it had its least-power radius. */
export function weigherOf(builder: ForestBuilder, weight: Float64Array | null): TubeWeight {
  return weight === null ? (row) => flowWeight(builder.load[row]!) : (row) => weight[row]!;
}
