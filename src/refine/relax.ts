import type { Watch } from '../core/progress.ts';
import { straighten } from '../moves/straighten.ts';
import { fermatPoint } from '../physics/fermat.ts';
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

/** Shares of the way to its best place that a node tries. */
const STEPS = [1, 0.5, 0.25, 0.1] as const;

/**
 * Moves junctions to where their three tubes cost least, as far as there is room, sweep after sweep; bends are
 * straightened away where the straight vessel fits and else drawn taut. Flows, radii and topology stay.
 *
 * With radii fixed a tube costs w·L, w = 8μQ²/(πr⁴) + mπr², so a junction's best place is the weighted Fermat point of
 * its neighbours. A move is made only if it lowers the cost and everything it touches still fits, so the forest is
 * feasible after every move.
 *
 * @param weight (rows of the builder) W/m of each tube
 * Cost: O(rows) a sweep.
 */
export function relaxJunctions(
  builder: ForestBuilder,
  room: Room,
  weight: Float64Array,
  options: RelaxOptions,
): RelaxResult {
  room.settle();
  const cost = [costOf(builder, weight)];
  let stopped: RelaxResult['stopped'] = 'budget';
  let sweep = 0;
  for (; sweep < options.sweeps; sweep++) {
    if (options.signal?.aborted) {
      stopped = 'cancelled';
      break;
    }
    options.onProgress?.({ stage: 'refine', done: sweep, total: options.sweeps });
    for (let row = 0; row < builder.count; row++) {
      if (builder.parent[row]! < 0 || room.pinned.has(row)) continue;
      const children = builder.childCount(row);
      if (children === 2) moveJunction(builder, room, weight, row);
      else if (children === 1 && !straighten(builder, room, row)) moveBend(builder, room, row);
    }
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
  for (let row = 0; row < builder.count; row++) {
    if (builder.parent[row]! >= 0) sum += weight[row]! * lengthOf(builder, row);
  }
  return sum;
}

function moveJunction(builder: ForestBuilder, room: Room, weight: Float64Array, row: number): void {
  const p = builder.position;
  const parent = builder.parent[row]!;
  const a = builder.child[2 * row]!;
  const b = builder.child[2 * row + 1]!;
  const target = new Float64Array(3);
  fermatPoint(
    p[3 * parent]!,
    p[3 * parent + 1]!,
    p[3 * parent + 2]!,
    p[3 * a]!,
    p[3 * a + 1]!,
    p[3 * a + 2]!,
    p[3 * b]!,
    p[3 * b + 1]!,
    p[3 * b + 2]!,
    weight[row]!,
    weight[a]!,
    weight[b]!,
    target,
  );
  const local = () =>
    weight[row]! * lengthOf(builder, row) + weight[a]! * lengthOf(builder, a) + weight[b]! * lengthOf(builder, b);
  tryMoves(builder, room, row, target, local, [a, b]);
}

/** Draws a bend towards the straight line between its neighbours. */
function moveBend(builder: ForestBuilder, room: Room, row: number): void {
  const p = builder.position;
  const parent = builder.parent[row]!;
  const a = builder.child[2 * row]!;
  const ux = p[3 * a]! - p[3 * parent]!;
  const uy = p[3 * a + 1]! - p[3 * parent + 1]!;
  const uz = p[3 * a + 2]! - p[3 * parent + 2]!;
  const uu = ux * ux + uy * uy + uz * uz;
  const t =
    ((p[3 * row]! - p[3 * parent]!) * ux +
      (p[3 * row + 1]! - p[3 * parent + 1]!) * uy +
      (p[3 * row + 2]! - p[3 * parent + 2]!) * uz) /
    uu;
  if (!(t > 0 && t < 1)) return;
  const target = new Float64Array([p[3 * parent]! + t * ux, p[3 * parent + 1]! + t * uy, p[3 * parent + 2]! + t * uz]);
  tryMoves(builder, room, row, target, () => lengthOf(builder, row) + lengthOf(builder, a), [a]);
}

function tryMoves(
  builder: ForestBuilder,
  room: Room,
  row: number,
  target: Float64Array,
  local: () => number,
  children: readonly number[],
): void {
  const p = builder.position;
  const parent = builder.parent[row]!;
  const x = p[3 * row]!;
  const y = p[3 * row + 1]!;
  const z = p[3 * row + 2]!;
  const dx = target[0]! - x;
  const dy = target[1]! - y;
  const dz = target[2]! - z;
  const before = local();
  if (dx * dx + dy * dy + dz * dz < 1e-16 * room.span * room.span) return;
  for (const step of STEPS) {
    p[3 * row] = x + step * dx;
    p[3 * row + 1] = y + step * dy;
    p[3 * row + 2] = z + step * dz;
    if (local() < before * (1 - 1e-12)) {
      room.begin();
      room.move(row);
      for (const child of children) room.move(child);
      if (
        room.fits(row) &&
        room.fits(parent) &&
        children.every((child) => room.fits(child)) &&
        room.certify(row, 1) &&
        children.every((child) => room.certify(child, 1))
      ) {
        room.commit();
        return;
      }
    }
  }
  p[3 * row] = x;
  p[3 * row + 1] = y;
  p[3 * row + 2] = z;
}

function lengthOf(builder: ForestBuilder, row: number): number {
  const p = builder.position;
  const a = 3 * builder.parent[row]!;
  const b = 3 * row;
  const dx = p[b]! - p[a]!;
  const dy = p[b + 1]! - p[a + 1]!;
  const dz = p[b + 2]! - p[a + 2]!;
  return Math.sqrt(dx * dx + dy * dy + dz * dz);
}
