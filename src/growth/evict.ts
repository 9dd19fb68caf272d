import { straighten } from '../moves/straighten.ts';
import type { Room } from '../room/room.ts';
import type { ForestBuilder } from '../tree/builder.ts';

/**
 * Takes a vessel and all below it out of a tree. The node it hung on becomes a bend, and is straightened away where
 * the straight vessel fits.
 *
 * @param onTerminal called with the row of each terminal before it goes
 * @returns false where the vessel is the tree's only one, which stays
 */
export function evict(builder: ForestBuilder, room: Room, row: number, onTerminal: (row: number) => void): boolean {
  let top = row;
  // A chain of bends goes with what hangs on it.
  while (true) {
    const above = builder.parent[top]!;
    if (above < 0 || builder.parent[above]! < 0 || room.pinned.has(above)) return false;
    if (builder.childCount(above) > 1) break;
    top = above;
  }
  const load = builder.load[top]!;
  const weight = builder.weight[top]!;
  const rows = [top];
  for (let k = 0; k < rows.length; k++) {
    const at = rows[k]!;
    for (let c = 0; c < 2; c++) {
      const child = builder.child[2 * at + c]!;
      if (child >= 0) rows.push(child);
    }
  }
  for (const at of rows) if (builder.childCount(at) === 0) onTerminal(at);
  const node = builder.parent[top]!;
  for (let k = rows.length - 1; k >= 0; k--) builder.removeTerminal(rows[k]!);
  for (let at = node; builder.parent[at]! >= 0; at = builder.parent[at]!) {
    builder.load[at]! -= load;
    builder.weight[at]! -= weight;
  }
  // The node now carries exactly what its other child does; say so without rounding.
  const left = builder.child[2 * node]!;
  builder.load[node] = builder.load[left]!;
  builder.weight[node] = builder.weight[left]!;
  straighten(builder, room, node);
  return true;
}
