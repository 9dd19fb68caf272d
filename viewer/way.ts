import { type TreeRecord, tubeLength } from './library.ts';

/** The way from a vessel back to its tree's root. */
export interface Way {
  /** Rows from the vessel's far end to the root, both included. */
  readonly rows: readonly number[];
  /** (rows) m from the root along the vessels. */
  readonly distance: readonly number[];
  /** (rows) Pa, or null where the file holds no solution. */
  readonly pressure: readonly number[] | null;
}

/** Follows parents from a row to its root. Cost: O(depth). */
export function wayToRoot(record: TreeRecord, row: number): Way {
  const { forest, field } = record;
  const rows: number[] = [];
  for (let at = row; at >= 0; at = forest.parent[at]!) rows.push(at);
  const distance = new Array<number>(rows.length).fill(0);
  for (let i = rows.length - 2; i >= 0; i--) distance[i] = distance[i + 1]! + tubeLength(forest, rows[i]!);
  return { rows, distance, pressure: field === null ? null : rows.map((at) => field.pressure[at]!) };
}
