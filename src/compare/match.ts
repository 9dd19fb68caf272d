import { type Children, listChildren } from '../tree/children.ts';
import type { Forest, TreeRecord } from '../tree/forest.ts';

/** Which row of B stands for each row of A, as far as their shapes agree. */
export interface Match {
  /** (rows of A) row of B, or −1. */
  readonly rowOfA: Int32Array;
  /** Rows of A and B that have no partner. */
  readonly unmatchedA: number;
  readonly unmatchedB: number;
  /** First pair of rows, in A's order, that branch into different numbers of vessels; null where all agree. */
  readonly parting: {
    readonly rowA: number;
    readonly rowB: number;
    readonly childrenA: number;
    readonly childrenB: number;
  } | null;
  /** Trees of A and B by index that have no partner. */
  readonly treesOnlyA: readonly number[];
  readonly treesOnlyB: readonly number[];
}

/**
 * Matches two forests from their roots out: trees by name, else by index; the children of a matched pair by nearest far
 * ends, so that the order of rows does not matter. Below a pair that branches differently nothing is matched.
 *
 * Cost: O(n).
 */
export function matchTrees(a: TreeRecord, b: TreeRecord): Match {
  const rowOfA = new Int32Array(a.forest.count).fill(-1);
  const treePairs = pairTrees(a.names, b.names);
  for (const [ta, tb] of treePairs) rowOfA[a.forest.treeStart[ta]!] = b.forest.treeStart[tb]!;
  const childrenA = listChildren(a.forest);
  const childrenB = listChildren(b.forest);
  let parting: Match['parting'] = null;
  let matched = 0;
  for (let rowA = 0; rowA < a.forest.count; rowA++) {
    const rowB = rowOfA[rowA]!;
    if (rowB < 0) continue;
    matched++;
    const countA = childrenA.start[rowA + 1]! - childrenA.start[rowA]!;
    const countB = childrenB.start[rowB + 1]! - childrenB.start[rowB]!;
    if (countA !== countB) {
      parting ??= { rowA, rowB, childrenA: countA, childrenB: countB };
      continue;
    }
    if (countA === 1) rowOfA[childrenA.list[childrenA.start[rowA]!]!] = childrenB.list[childrenB.start[rowB]!]!;
    else if (countA > 1) pairChildren(a.forest, b.forest, childrenA, childrenB, rowA, rowB, rowOfA);
  }
  const pairedA = new Set(treePairs.map(([ta]) => ta));
  const pairedB = new Set(treePairs.map(([, tb]) => tb));
  return {
    rowOfA,
    unmatchedA: a.forest.count - matched,
    unmatchedB: b.forest.count - matched,
    parting,
    treesOnlyA: a.names.map((_, t) => t).filter((t) => !pairedA.has(t)),
    treesOnlyB: b.names.map((_, t) => t).filter((t) => !pairedB.has(t)),
  };
}

/** Pairs trees of the same name, then what is left in order. */
function pairTrees(a: readonly string[], b: readonly string[]): [number, number][] {
  const pairs: [number, number][] = [];
  const free = new Set(b.keys());
  const left: number[] = [];
  a.forEach((name, ta) => {
    const tb = b.indexOf(name);
    if (tb >= 0 && free.delete(tb)) pairs.push([ta, tb]);
    else left.push(ta);
  });
  const rest = [...free];
  left.slice(0, rest.length).forEach((ta, k) => {
    pairs.push([ta, rest[k]!]);
  });
  return pairs;
}

/** Pairs two equally long lists of children: closest far ends first, ties by flow, then by row. */
function pairChildren(
  a: Forest,
  b: Forest,
  childrenA: Children,
  childrenB: Children,
  rowA: number,
  rowB: number,
  rowOfA: Int32Array,
): void {
  const fromA = childrenA.start[rowA]!;
  const fromB = childrenB.start[rowB]!;
  const count = childrenA.start[rowA + 1]! - fromA;
  if (count === 2) {
    const [a0, a1] = [childrenA.list[fromA]!, childrenA.list[fromA + 1]!];
    const [b0, b1] = [childrenB.list[fromB]!, childrenB.list[fromB + 1]!];
    const straight = squaredDistance(a, a0, b, b0) + squaredDistance(a, a1, b, b1);
    const crossed = squaredDistance(a, a0, b, b1) + squaredDistance(a, a1, b, b0);
    const swap =
      crossed < straight ||
      (crossed === straight &&
        Math.abs(a.flow[a0]! - b.flow[b1]!) + Math.abs(a.flow[a1]! - b.flow[b0]!) <
          Math.abs(a.flow[a0]! - b.flow[b0]!) + Math.abs(a.flow[a1]! - b.flow[b1]!));
    rowOfA[a0] = swap ? b1 : b0;
    rowOfA[a1] = swap ? b0 : b1;
    return;
  }
  const pairs: { rowA: number; rowB: number; distance: number; flow: number }[] = [];
  for (let i = 0; i < count; i++) {
    for (let j = 0; j < count; j++) {
      const [childA, childB] = [childrenA.list[fromA + i]!, childrenB.list[fromB + j]!];
      pairs.push({
        rowA: childA,
        rowB: childB,
        distance: squaredDistance(a, childA, b, childB),
        flow: Math.abs(a.flow[childA]! - b.flow[childB]!),
      });
    }
  }
  pairs.sort((p, q) => p.distance - q.distance || p.flow - q.flow || p.rowA - q.rowA || p.rowB - q.rowB);
  const taken = new Set<number>();
  for (const pair of pairs) {
    if (rowOfA[pair.rowA]! >= 0 || taken.has(pair.rowB)) continue;
    rowOfA[pair.rowA] = pair.rowB;
    taken.add(pair.rowB);
  }
}

function squaredDistance(a: Forest, i: number, b: Forest, j: number): number {
  const dx = a.position[3 * i]! - b.position[3 * j]!;
  const dy = a.position[3 * i + 1]! - b.position[3 * j + 1]!;
  const dz = a.position[3 * i + 2]! - b.position[3 * j + 2]!;
  return dx * dx + dy * dy + dz * dz;
}
