import type { FaultList } from '../faults.ts';
import type { ByteSource } from '../format.ts';
import { type LineData, openPiece } from './data-set-reader.ts';

/**
 * Reads the points and lines of a VTK XML PolyData file of one piece.
 *
 * @returns null after a fault
 * Source: VTK XML formats as documented by Kitware; cells in the order verts, lines, strips or polys, and cell data along.
 */
export function openPolyData(content: Uint8Array | ByteSource, name: string, faults: FaultList): LineData | null {
  const piece = openPiece(content, name, 'PolyData', faults);
  if (piece === null) return null;
  const lines = piece.count('NumberOfLines');
  const before = piece.count('NumberOfVerts');
  const cells = before + lines + piece.count('NumberOfStrips') + piece.count('NumberOfPolys');
  const ends = piece.read('Lines', 'offsets');
  const connectivity = piece.read('Lines', 'connectivity');
  if (ends === null || connectivity === null) return null;
  if (ends.length !== lines) {
    faults.add('length', `${name} Lines offsets`, `got ${ends.length} numbers, expected ${lines}`);
    return null;
  }
  const cell = new Int32Array(lines);
  for (let l = 0; l < lines; l++) cell[l] = before + l;
  return { ...piece, lines, connectivity, ends, cell, cells };
}
