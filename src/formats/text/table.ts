import type { FaultList } from '../faults.ts';
import { eachLine } from './lines.ts';
import { parseReal } from './numbers.ts';

/** A comma-separated table with a header line, of which some columns were read. */
export interface Table {
  readonly name: string;
  readonly header: readonly string[];
  readonly rows: number;
  /** (rows) line of each row in the file. */
  readonly line: Int32Array;
  /** Numbers of a column read as such. */
  readonly reals: ReadonlyMap<string, Float64Array>;
  /** Texts of a column read as such. */
  readonly texts: ReadonlyMap<string, readonly string[]>;
}

/**
 * Reads a table.
 *
 * @param typeOf how a column shall be read; null: passed over
 * @returns      null after a fault that leaves nothing to go on
 * Source: RFC 4180; a field may be quoted, but not over several lines. Lines that are empty are passed over.
 * Cost: O(bytes); numbers go straight into columns.
 */
export function readTable(
  bytes: Uint8Array,
  name: string,
  typeOf: (column: string) => 'real' | 'text' | null,
  faults: FaultList,
): Table | null {
  let header: string[] | null = null;
  let reals: { at: number; column: string; values: Float64Array }[] = [];
  let texts: { at: number; column: string; values: string[] }[] = [];
  let line = new Int32Array(256);
  let rows = 0;
  eachLine(bytes, (text, number) => {
    if (text.trim() === '') return;
    const fields = splitFields(text);
    if (fields === null) {
      faults.add('quotes', `${name}:${number}`, 'got a quote without its other, expected both on one line');
      return;
    }
    if (header === null) {
      header = fields.map((field) => field.trim());
      reals = [];
      texts = [];
      const seen = new Set<string>();
      header.forEach((column, at) => {
        if (seen.has(column)) faults.add('column', `${name}:${number}`, `got column ${column} twice`);
        seen.add(column);
        const type = typeOf(column);
        if (type === 'real') reals.push({ at, column, values: new Float64Array(256) });
        else if (type === 'text') texts.push({ at, column, values: [] });
      });
      return;
    }
    if (fields.length !== header.length) {
      faults.add('fields', `${name}:${number}`, `got ${fields.length} fields, expected ${header.length}`);
      return;
    }
    if (rows === line.length) {
      const longer = new Int32Array(2 * rows);
      longer.set(line);
      line = longer;
      for (const column of reals) {
        const grown = new Float64Array(2 * rows);
        grown.set(column.values);
        column.values = grown;
      }
    }
    line[rows] = number;
    for (const column of reals) {
      const value = parseReal(fields[column.at]!);
      if (Number.isNaN(value)) {
        faults.add('number', `${name}:${number}`, `got ${column.column} "${fields[column.at]}", expected a number`);
      }
      column.values[rows] = value;
    }
    for (const column of texts) column.values.push(fields[column.at]!.trim());
    rows++;
  });
  if (header === null) {
    faults.add('empty', name, 'got no line, expected a header and rows');
    return null;
  }
  return {
    name,
    header,
    rows,
    line: line.slice(0, rows),
    reals: new Map(reals.map((column) => [column.column, column.values.slice(0, rows)])),
    texts: new Map(texts.map((column) => [column.column, column.values])),
  };
}

function splitFields(text: string): string[] | null {
  if (!text.includes('"')) return text.split(',');
  const fields: string[] = [];
  let at = 0;
  for (;;) {
    if (text[at] !== '"') {
      const end = text.indexOf(',', at);
      fields.push(end < 0 ? text.slice(at) : text.slice(at, end));
      if (end < 0) return fields;
      at = end + 1;
      continue;
    }
    let field = '';
    let from = at + 1;
    for (;;) {
      const end = text.indexOf('"', from);
      if (end < 0) return null;
      field += text.slice(from, end);
      from = end + 1;
      if (text[from] !== '"') break;
      field += '"';
      from++;
    }
    fields.push(field);
    if (from >= text.length) return fields;
    if (text[from] !== ',') return null;
    at = from + 1;
  }
}
