import type { Forest } from './forest.ts';

/** Number of tubes: every row but the roots. */
export function countVessels(forest: Forest): number {
  return forest.count - (forest.treeStart.length - 1);
}

/** Vessel number (cell index in every file) of a row that is not a root. */
export function vesselOfRow(forest: Forest, row: number): number {
  return row - forest.tree[row]! - 1;
}

/** Row of a vessel number. Cost: O(trees). */
export function rowOfVessel(forest: Forest, vessel: number): number {
  const trees = forest.treeStart.length - 1;
  for (let t = 0; t < trees; t++) {
    const row = vessel + t + 1;
    if (row < forest.treeStart[t + 1]!) return row;
  }
  return -1;
}

/** Name of a vessel in messages: `<tree>:<vessel number>`. */
export function vesselName(forest: Forest, names: readonly string[], row: number): string {
  const tree = forest.tree[row]!;
  return `${names[tree] ?? tree}:${vesselOfRow(forest, row)}`;
}

/** Length in m of the tube that ends at a row; 0 for a root. */
export function tubeLength(forest: Forest, row: number): number {
  const parent = forest.parent[row]!;
  if (parent < 0) return 0;
  const p = forest.position;
  const dx = p[3 * row]! - p[3 * parent]!;
  const dy = p[3 * row + 1]! - p[3 * parent + 1]!;
  const dz = p[3 * row + 2]! - p[3 * parent + 2]!;
  return Math.sqrt(dx * dx + dy * dy + dz * dz);
}
