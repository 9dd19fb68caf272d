/** One tree's rows as sizing reads them, in any numbering. */
export interface SizedRows {
  /** Rows of one tree, root first, parents before children. */
  readonly order: ArrayLike<number>;
  /** (n) parent row; −1 for the root. */
  readonly parent: ArrayLike<number>;
  /** (3n) m */
  readonly position: ArrayLike<number>;
  /** (n) m³/s */
  readonly flow: ArrayLike<number>;
}

/** Length in m of the tube that ends at a row. */
export function rowLength(rows: SizedRows, row: number): number {
  const p = rows.position;
  const a = 3 * rows.parent[row]!;
  const b = 3 * row;
  const dx = p[b]! - p[a]!;
  const dy = p[b + 1]! - p[a + 1]!;
  const dz = p[b + 2]! - p[a + 2]!;
  return Math.sqrt(dx * dx + dy * dy + dz * dz);
}
