import type { FaultList } from '../faults.ts';
import { parseReal } from '../text/numbers.ts';
import { openVtk, type VtkFile } from './array-reader.ts';
import { childOf, type Element } from './xml.ts';

/** A PolyData file's points and lines, and its other arrays to be read by name. */
export interface PolyData {
  readonly file: VtkFile;
  readonly points: number;
  /** (3 points) */
  readonly position: Float64Array;
  readonly lines: number;
  /** Point indices of all lines, one line after another, unchecked. */
  readonly connectivity: Float64Array;
  /** (lines) one past the last index of each line. */
  readonly ends: Float64Array;
  /** Cells that come before the lines in cell data. */
  readonly cellsBefore: number;
  /** All cells, the length of a cell array. */
  readonly cells: number;
  readonly cellData: readonly Element[];
  readonly pointData: readonly Element[];
  readonly fieldData: readonly Element[];
}

/**
 * Reads the points and lines of a VTK XML PolyData file of one piece.
 *
 * @returns null after a fault
 * Source: VTK XML formats as documented by Kitware; cells in the order verts, lines, strips or polys, and cell data along.
 */
export function openPolyData(bytes: Uint8Array, name: string, faults: FaultList): PolyData | null {
  const file = openVtk(bytes, name, faults);
  if (file === null) return null;
  if (file.type !== 'PolyData') {
    faults.add('type', name, `got VTK data of type ${file.type || '(none)'}, expected PolyData`);
    return null;
  }
  const data = childOf(file.root, 'PolyData');
  const pieces = data?.children.filter((child) => child.name === 'Piece') ?? [];
  if (pieces.length !== 1) {
    faults.add('pieces', name, `got ${pieces.length} pieces, expected 1`);
    return null;
  }
  const piece = pieces[0]!;
  const count = (attribute: string): number => {
    const text = piece.attributes[attribute] ?? '0';
    const value = parseReal(text);
    if (Number.isInteger(value) && value >= 0) return value;
    faults.add('count', `${name} ${attribute}`, `got "${text}", expected a whole number`);
    return 0;
  };
  const points = count('NumberOfPoints');
  const lines = count('NumberOfLines');
  const cellsBefore = count('NumberOfVerts');
  const cells = cellsBefore + lines + count('NumberOfStrips') + count('NumberOfPolys');
  if (faults.count > 0) return null;
  const array = (section: string, of: string | null): Element | undefined =>
    childOf(piece, section)?.children.find((child) => of === null || child.attributes.Name === of);
  const read = (section: string, of: string | null): Float64Array | null => {
    const element = array(section, of);
    if (element !== undefined) return file.numbers(element);
    faults.add('missing', `${name} ${section}`, `got no array${of === null ? '' : ` ${of}`}, expected one`);
    return null;
  };
  const position = read('Points', null);
  const ends = read('Lines', 'offsets');
  const connectivity = read('Lines', 'connectivity');
  if (position === null || ends === null || connectivity === null) return null;
  if (position.length !== 3 * points) {
    faults.add('length', `${name} Points`, `got ${position.length} numbers, expected ${3 * points}`);
  }
  if (ends.length !== lines) {
    faults.add('length', `${name} Lines offsets`, `got ${ends.length} numbers, expected ${lines}`);
  }
  const children = (element: Element | undefined): Element[] =>
    element?.children.filter((child) => child.name === 'DataArray' || child.name === 'Array') ?? [];
  return {
    file,
    points,
    position,
    lines,
    connectivity,
    ends,
    cellsBefore,
    cells,
    cellData: children(childOf(piece, 'CellData')),
    pointData: children(childOf(piece, 'PointData')),
    fieldData: [...children(childOf(data, 'FieldData')), ...children(childOf(piece, 'FieldData'))],
  };
}
