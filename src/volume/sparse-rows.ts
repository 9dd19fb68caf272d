/** The pattern of a square matrix with entries where two vertices share a tetrahedron, and on its diagonal. */
export interface SparseRows {
  readonly count: number;
  /** (count + 1) begin of each row's entries. */
  readonly start: Int32Array;
  /** Columns, rising within each row. */
  readonly column: Int32Array;
  /** (count) place of each row's diagonal entry. */
  readonly diagonal: Int32Array;
}

/**
 * @param cells (4 each) vertices 0 to count − 1
 * Cost:  O(cells), and a sort of each row
 */
export function buildSparseRows(cells: Int32Array, count: number): SparseRows {
  const most = new Int32Array(count + 1);
  for (const v of cells) most[v + 1]! += 3;
  for (let v = 0; v < count; v++) most[v + 1]! += most[v]! + 1;
  const fill = most.slice(0, count);
  const wide = new Int32Array(most[count]!);
  for (let v = 0; v < count; v++) wide[fill[v]!++] = v;
  for (let at = 0; at < cells.length; at += 4) {
    for (let i = 0; i < 4; i++) {
      const v = cells[at + i]!;
      for (let j = 0; j < 4; j++) if (j !== i) wide[fill[v]!++] = cells[at + j]!;
    }
  }
  const start = new Int32Array(count + 1);
  const diagonal = new Int32Array(count);
  let end = 0;
  for (let v = 0; v < count; v++) {
    const row = wide.subarray(most[v]!, most[v + 1]!).sort();
    start[v] = end;
    let last = -1;
    // What is written never passes what is still to be read.
    for (const w of row) {
      if (w === last) continue;
      last = w;
      if (w === v) diagonal[v] = end;
      wide[end++] = w;
    }
  }
  start[count] = end;
  return { count, start, column: wide.slice(0, end), diagonal };
}

/** Place of an entry that is there. */
export function entryAt({ start, column }: SparseRows, row: number, col: number): number {
  let low = start[row]!;
  let high = start[row + 1]! - 1;
  while (low < high) {
    const middle = (low + high) >> 1;
    if (column[middle]! < col) low = middle + 1;
    else high = middle;
  }
  return low;
}
