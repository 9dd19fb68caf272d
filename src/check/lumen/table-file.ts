import { type Fault, InputError, inputError } from '../../core/errors.ts';

/** A table with a header line, as text cells. */
export interface TableFile {
  readonly file: string;
  readonly columns: readonly string[];
  /** One array a line, as long as `columns`. */
  readonly rows: readonly (readonly string[])[];
  /** Line of the file that each row stands on, from 1. */
  readonly lines: readonly number[];
}

/**
 * Reads comma-separated values; lines that start with `#` are notes.
 *
 * @param needed columns that must be there
 * @throws InputError where a column is missing or a line has another number of cells
 */
export function readTable(file: string, text: string, needed: readonly string[]): TableFile {
  const faults: Fault[] = [];
  let columns: readonly string[] | null = null;
  const rows: string[][] = [];
  const lines: number[] = [];
  text.split('\n').forEach((raw, k) => {
    const line = raw.trim();
    if (line === '' || line.startsWith('#')) return;
    const cells = line.split(',').map((cell) => cell.trim().replace(/^"(.*)"$/, '$1'));
    if (columns === null) {
      columns = cells;
      for (const column of needed) {
        if (!cells.includes(column)) {
          faults.push({ code: 'missing-column', where: `${file}:${k + 1}`, message: `no column ${column}` });
        }
      }
      return;
    }
    if (cells.length !== columns.length) {
      const message = `got ${cells.length} cells, expected ${columns.length}`;
      faults.push({ code: 'bad-row', where: `${file}:${k + 1}`, message });
      return;
    }
    rows.push(cells);
    lines.push(k + 1);
  });
  if (columns === null) throw inputError('empty-table', file, 'got no header, expected a table');
  if (faults.length > 0) throw new InputError(faults);
  return { file, columns, rows, lines };
}

/** Cells of a column as text. */
export function textColumn(table: TableFile, column: string): string[] {
  const at = table.columns.indexOf(column);
  return table.rows.map((row) => row[at]!);
}

/**
 * Cells of a column as numbers.
 *
 * @throws InputError naming every line whose cell is not a finite number
 */
export function numberColumn(table: TableFile, column: string): Float64Array {
  const faults: Fault[] = [];
  const values = Float64Array.from(textColumn(table, column), (cell, k) => {
    const value = cell === '' ? Number.NaN : Number(cell);
    if (!Number.isFinite(value)) {
      const message = `${column}: got "${cell}", expected a finite number`;
      faults.push({ code: 'not-a-number', where: `${table.file}:${table.lines[k]}`, message });
    }
    return value;
  });
  if (faults.length > 0) throw new InputError(faults);
  return values;
}
