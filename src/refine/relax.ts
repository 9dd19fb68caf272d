import type { Watch } from '../core/progress.ts';
import { NodeMover } from '../moves/move-node.ts';
import type { Room } from '../room/room.ts';
import type { ForestBuilder } from '../tree/builder.ts';

export interface RelaxOptions extends Watch {
  /** Most sweeps over all nodes. */
  readonly sweeps: number;
  /** Ends when a sweep gains less than this share of the cost. */
  readonly tolerance: number;
  /** Looked at after each sweep with the cost so far (W); true ends the work. */
  readonly enough?: ((sweep: number, cost: number) => boolean) | undefined;
}

export interface RelaxResult {
  readonly sweeps: number;
  /** (sweeps + 1) W; before, then after each sweep. */
  readonly cost: readonly number[];
  readonly stopped: 'converged' | 'budget' | 'cancelled';
}

/**
 * Moves junctions to where their three tubes cost least, as far as there is room, sweep after sweep; bends are
 * straightened away where the straight vessel fits and else drawn taut. Flows, radii and topology stay.
 *
 * @param weight (rows of the builder) W/m of each tube: with radii fixed, 8μQ²/(πr⁴) + mπr²
 * Cost: O(rows) a sweep.
 */
export function relaxJunctions(
  builder: ForestBuilder,
  room: Room,
  weight: Float64Array,
  options: RelaxOptions,
): RelaxResult {
  room.settle();
  const mover = new NodeMover(builder, room, [1, 0.5, 0.25, 0.1]);
  const cost = [costOf(builder, weight)];
  let stopped: RelaxResult['stopped'] = 'budget';
  let sweep = 0;
  for (; sweep < options.sweeps; sweep++) {
    if (options.signal?.aborted) {
      stopped = 'cancelled';
      break;
    }
    options.onProgress?.({ stage: 'refine', done: sweep, total: options.sweeps });
    for (let row = 0; row < builder.count; row++) mover.move(row, weight, 0);
    const before = cost[cost.length - 1]!;
    const after = costOf(builder, weight);
    cost.push(after);
    if (before - after <= options.tolerance * before) {
      stopped = 'converged';
      sweep++;
      break;
    }
    if (options.enough?.(sweep + 1, after)) {
      sweep++;
      break;
    }
  }
  return { sweeps: sweep, cost, stopped };
}

/** W; Σ w L over all tubes. */
export function costOf(builder: ForestBuilder, weight: Float64Array): number {
  let sum = 0;
  const p = builder.position;
  for (let row = 0; row < builder.count; row++) {
    const parent = builder.parent[row]!;
    if (parent < 0) continue;
    const dx = p[3 * row]! - p[3 * parent]!;
    const dy = p[3 * row + 1]! - p[3 * parent + 1]!;
    const dz = p[3 * row + 2]! - p[3 * parent + 2]!;
    sum += weight[row]! * Math.sqrt(dx * dx + dy * dy + dz * dz);
  }
  return sum;
}
