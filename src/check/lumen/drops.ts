import type { Tally } from '../result.ts';
import type { BoundaryTable } from './boundary.ts';
import type { NetworkTable } from './network.ts';
import type { MeshNotes } from './notes.ts';

/**
 * Pressure lost between a node and every other that is joined to it, by the tube law with the lengths given.
 *
 * @param lengths (n) m
 * @returns Pa by node; in a tree, all of them away from its root
 * Cost: O(n)
 */
function dropsFrom(
  network: NetworkTable,
  segmentsAt: ReadonlyMap<string, readonly number[]>,
  root: string,
  lengths: ArrayLike<number>,
  viscosity: number,
): Map<string, number> {
  const drop = new Map([[root, 0]]);
  const open = [root];
  while (open.length > 0) {
    const node = open.pop()!;
    for (const k of segmentsAt.get(node) ?? []) {
      const next = network.from[k] === node ? network.to[k]! : network.from[k]!;
      if (drop.has(next)) continue;
      const square = network.radius[k]! * network.radius[k]!;
      const fall = (8 * viscosity * lengths[k]! * Math.abs(network.flow[k]!)) / (Math.PI * square * square);
      drop.set(next, drop.get(node)! + fall);
      open.push(next);
    }
  }
  return drop;
}

/**
 * Holds the drops that `boundary.csv` and `mesh.json` state between roots and caps to those of the two networks, and the
 * choice of network in the one to that in the other.
 *
 * @param shortened (n) m, effective lengths worked out again
 * @param tally     sees |drop − drop worked out again| over the latter, a row of the boundary table
 */
export function lookAtDrops(
  network: NetworkTable,
  shortened: ArrayLike<number>,
  boundary: BoundaryTable,
  notes: MeshNotes,
  tally: Tally,
): void {
  const segmentsAt = new Map<string, number[]>();
  for (let k = 0; k < network.count; k++) {
    for (const node of [network.from[k]!, network.to[k]!]) {
      const here = segmentsAt.get(node);
      if (here === undefined) segmentsAt.set(node, [k]);
      else here.push(k);
    }
  }
  const told = new Map(notes.drops?.map((drop) => [drop.patch, drop]));
  const columns = boundary.drops;
  const node = (row: number) =>
    network.nodeNear(boundary.centre[3 * row]!, boundary.centre[3 * row + 1]!, boundary.centre[3 * row + 2]!);
  const seen = new Set<string>();
  for (let root = 0; root < boundary.count; root++) {
    if (boundary.resistance[root] !== '' || seen.has(boundary.tree[root]!)) continue;
    seen.add(boundary.tree[root]!);
    const [axis, effective] = [network.length, shortened].map((lengths) =>
      dropsFrom(network, segmentsAt, node(root), lengths, notes.viscosity),
    ) as [Map<string, number>, Map<string, number>];
    for (let row = 0; row < boundary.count; row++) {
      if (boundary.tree[row] !== boundary.tree[root]) continue;
      const name = boundary.name[row]!;
      const fail = (message: string) => tally.fail(name, row, 1, 0, message);
      const wanted = [axis.get(node(row)), effective.get(node(row))];
      const inNotes = told.get(name);
      if (row !== root && notes.drops !== null && inNotes === undefined) fail('mesh.json gives no drop to the cap');
      let off = 0;
      for (const [k, want] of wanted.entries()) {
        const got = [columns?.[k]?.[row], row === root ? undefined : inNotes?.drop[k]];
        for (const value of got) {
          if (value === undefined) continue;
          off = Math.max(off, want === undefined ? 1 : Math.abs(value - want) / Math.max(want, Number.MIN_VALUE));
        }
      }
      tally.see(off, row);
      if (boundary.lengths !== null && boundary.lengths[row] !== notes.lengths)
        fail(`lengths: got "${boundary.lengths[row]}", mesh.json says "${notes.lengths}"`);
    }
  }
}
