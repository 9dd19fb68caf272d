import type { FaultList } from '../faults.ts';
import type { ByteSource } from '../format.ts';
import { LINE, POLY_LINE } from './cell-types.ts';
import { type LineData, openPiece } from './data-set-reader.ts';

/**
 * Reads the points and lines of a VTK XML UnstructuredGrid file of one piece; cells of other types are passed over.
 *
 * @returns null after a fault
 * Source: VTK XML formats as documented by Kitware.
 */
export function openLineGrid(content: Uint8Array | ByteSource, name: string, faults: FaultList): LineData | null {
  const piece = openPiece(content, name, 'UnstructuredGrid', faults);
  if (piece === null) return null;
  const cells = piece.count('NumberOfCells');
  const allEnds = piece.read('Cells', 'offsets');
  const types = piece.read('Cells', 'types');
  const all = piece.read('Cells', 'connectivity');
  if (allEnds === null || types === null || all === null) return null;
  for (const [array, values] of [
    ['offsets', allEnds],
    ['types', types],
  ] as const) {
    if (values.length === cells) continue;
    faults.add('length', `${name} Cells ${array}`, `got ${values.length} numbers, expected ${cells}`);
  }
  if (faults.count > 0) return null;
  // Lines are moved down over the cells between them, in place.
  const cell = new Int32Array(cells);
  const ends = allEnds.slice();
  let lines = 0;
  let size = 0;
  for (let c = 0, from = 0; c < cells; c++) {
    const end = allEnds[c]!;
    if (!(Number.isInteger(end) && end >= from && end <= all.length)) {
      faults.add(
        'cell',
        `${name} cell ${c}`,
        `runs over indices ${from} to ${end} of ${all.length}, expected a run within`,
      );
      return null;
    }
    if (types[c] === LINE || types[c] === POLY_LINE) {
      if (size < from) all.copyWithin(size, from, end);
      size += end - from;
      ends[lines] = size;
      cell[lines++] = c;
    }
    from = end;
  }
  return {
    ...piece,
    lines,
    connectivity: all.subarray(0, size),
    ends: ends.subarray(0, lines),
    cell: cell.subarray(0, lines),
    cells,
  };
}
