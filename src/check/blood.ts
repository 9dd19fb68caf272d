import type { TreeSpec } from '../spec/types.ts';
import type { TreeRecord } from '../tree/forest.ts';
import { buildBoxTree, traversalStack, visitOverlaps } from './box-tree.ts';
import type { Tally } from './result.ts';
import type { ChildLists } from './rows.ts';

/** Flow into every node against the flow out of it, over the flow of the tree's root. */
export function measureConservation(record: TreeRecord, children: ChildLists, tally: Tally): void {
  const { count, parent, flow, tree, treeStart } = record.forest;
  for (let i = 0; i < count; i++) {
    if (parent[i]! < 0 || children.count[i] === 0) continue;
    let out = 0;
    for (let c = children.first[i]!; c >= 0; c = children.next[c]!) out += flow[c]!;
    tally.see(Math.abs(flow[i]! - out) / flow[treeStart[tree[i]!]!]!, i);
  }
}

/** Tallies of what a tree was asked to carry and to reach. */
export interface ServiceTallies {
  /** Sees |Q_root/asked − 1| a tree. */
  readonly inlet: Tally;
  /** Sees |Q/(share × whole) − 1| a terminal. */
  readonly shares: Tally;
  /** Takes terminals that are missing or in the wrong place; values are counts or m. */
  readonly terminals: Tally;
}

/**
 * Looks whether one tree carries the flow asked for and serves the terminals asked for.
 *
 * Shares are taken over the terminals that are there: a missing terminal is one finding, not a wrong share in all others.
 * Where territories share the flow, shares are those of the territories told; whether these are right is another promise.
 *
 * @param size m, of the tissue; explicit points must be hit within 1e-9 of it
 * @returns    rows of the tree's terminals
 */
export function measureService(
  record: TreeRecord,
  children: ChildLists,
  t: number,
  asked: TreeSpec,
  size: number,
  tallies: ServiceTallies,
): readonly number[] {
  const { flow, treeStart } = record.forest;
  const root = treeStart[t]!;
  const name = record.names[t] ?? String(t);
  tallies.inlet.see(Math.abs(flow[root + 1]! / asked.inlet.flow - 1), root + 1);
  const terminals: number[] = [];
  for (let i = root + 1; i < treeStart[t + 1]!; i++) if (children.count[i] === 0) terminals.push(i);

  if (asked.terminals.by !== 'points') {
    if (asked.terminals.byTerritory) measureToldShares(record, root, terminals, tallies.shares);
    else
      for (const i of terminals) tallies.shares.see(Math.abs((flow[i]! * terminals.length) / flow[root + 1]! - 1), i);
    tallies.terminals.checked += terminals.length;
    if (asked.terminals.by === 'count' && terminals.length !== asked.terminals.count) {
      const { count } = asked.terminals;
      const message = `${terminals.length} terminals, asked ${count}`;
      tallies.terminals.fail(name, -1, Math.abs(terminals.length - count), 0, message);
    }
    return terminals;
  }

  const { points, share } = asked.terminals;
  const pointOf = matchPoints(record, terminals, points, 1e-9 * size);
  const terminalOf = new Int32Array(points.length).fill(-1);
  let served = 0;
  let servedFlow = 0;
  terminals.forEach((row, k) => {
    tallies.terminals.checked++;
    const point = pointOf[k]!;
    if (point < 0) {
      const message = 'ends at none of the points asked for';
      tallies.terminals.fail(tallies.terminals.head.nameOf(row), row, 1, 0, message);
      return;
    }
    terminalOf[point] = row;
    served += share[point]!;
    servedFlow += flow[row]!;
  });
  if (asked.terminals.byTerritory) measureToldShares(record, root, terminals, tallies.shares);
  points.forEach((point, k) => {
    const row = terminalOf[k]!;
    if (row >= 0) {
      if (asked.terminals.byTerritory) return;
      tallies.shares.see(Math.abs(flow[row]! / ((share[k]! / served) * servedFlow) - 1), row);
      return;
    }
    const place = point.map((x) => (1000 * x).toPrecision(6)).join(', ');
    tallies.terminals.fail(name, -1, 1, 0, `point ${k} (${place}) mm is not reached`);
  });
  return terminals;
}

/** Flows against the territories that the record tells, where it does. */
function measureToldShares(record: TreeRecord, root: number, terminals: readonly number[], tally: Tally): void {
  const { forest, territory } = record;
  if (!territory) return;
  let whole = 0;
  for (const i of terminals) whole += territory[i]!;
  for (const i of terminals)
    tally.see(Math.abs((forest.flow[i]! * whole) / (forest.flow[root + 1]! * territory[i]!) - 1), i);
}

/** Point that each terminal ends at, or −1; every point is taken once. */
function matchPoints(
  record: TreeRecord,
  terminals: readonly number[],
  points: readonly (readonly [number, number, number])[],
  near: number,
): Int32Array {
  const { position } = record.forest;
  const tree = buildBoxTree(points.length, (item, out) => {
    for (let k = 0; k < 3; k++) {
      const x = points[item]![k as 0 | 1 | 2];
      out[k] = x - near;
      out[k + 3] = x + near;
    }
  });
  const stack = traversalStack();
  const query = new Float64Array(6);
  const taken = new Uint8Array(points.length);
  const found = new Int32Array(terminals.length).fill(-1);
  let at = 0;
  let best = -1;
  let bestDistance = near;
  const look = (slot: number) => {
    const item = tree.item[slot]!;
    if (taken[item] === 1) return;
    const [x, y, z] = points[item]!;
    const distance = Math.hypot(position[at]! - x, position[at + 1]! - y, position[at + 2]! - z);
    if (distance < bestDistance || (distance === bestDistance && (best < 0 || item < best))) {
      best = item;
      bestDistance = distance;
    }
  };
  terminals.forEach((row, k) => {
    at = 3 * row;
    for (let axis = 0; axis < 3; axis++) {
      query[axis] = position[at + axis]!;
      query[axis + 3] = position[at + axis]!;
    }
    best = -1;
    bestDistance = near;
    visitOverlaps(tree, query, 0, stack, look);
    if (best < 0) return;
    found[k] = best;
    taken[best] = 1;
  });
  return found;
}
