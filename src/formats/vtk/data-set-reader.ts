import type { FaultList } from '../faults.ts';
import type { ByteSource } from '../format.ts';
import { parseReal } from '../text/numbers.ts';
import { openVtk, type VtkFile } from './array-reader.ts';
import { childOf, type Element } from './xml.ts';

/** The only piece of a VTK XML file: its points read, its other arrays to be read by name. */
export interface Piece {
  readonly file: VtkFile;
  readonly points: number;
  /** (3 points) */
  readonly position: Float64Array;
  readonly pointData: readonly Element[];
  readonly cellData: readonly Element[];
  readonly fieldData: readonly Element[];
  /** A whole number ≥ 0 that the piece states; 0 where it does not, and after a fault. */
  count(attribute: string): number;
  /** Whole numbers, unchecked, of the array of a name in a section; null after a fault. */
  read(section: string, name: string): Float64Array | Int32Array | null;
}

/** A data set's lines, and its other arrays to be read by name. */
export interface LineData {
  readonly file: VtkFile;
  readonly points: number;
  /** (3 points) */
  readonly position: Float64Array;
  readonly lines: number;
  /** Point indices of all lines, one line after another, unchecked. */
  readonly connectivity: Float64Array | Int32Array;
  /** (lines) one past the last index of each line. */
  readonly ends: Float64Array | Int32Array;
  /** (lines) which of the cells each line is. */
  readonly cell: Int32Array;
  /** All cells, the length of a cell array. */
  readonly cells: number;
  readonly pointData: readonly Element[];
  readonly cellData: readonly Element[];
  readonly fieldData: readonly Element[];
}

/**
 * Opens a VTK XML file of one piece and reads its points.
 *
 * @returns null after a fault
 * Source: VTK XML formats as documented by Kitware.
 */
export function openPiece(
  content: Uint8Array | ByteSource,
  name: string,
  type: 'PolyData' | 'UnstructuredGrid',
  faults: FaultList,
): Piece | null {
  const file = openVtk(content, name, faults);
  if (file === null) return null;
  if (file.type !== type) {
    faults.add('type', name, `got VTK data of type ${file.type || '(none)'}, expected ${type}`);
    return null;
  }
  const data = childOf(file.root, type);
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
  const find = (section: string, of: string | null): Element | null => {
    const element = childOf(piece, section)?.children.find((child) => of === null || child.attributes.Name === of);
    if (element !== undefined) return element;
    faults.add('missing', `${name} ${section}`, `got no array${of === null ? '' : ` ${of}`}, expected one`);
    return null;
  };
  const read = (section: string, of: string): Float64Array | Int32Array | null => {
    const array = find(section, of);
    return array === null ? null : file.indices(array);
  };
  const points = count('NumberOfPoints');
  const coordinates = find('Points', null);
  const position = coordinates === null ? null : file.numbers(coordinates);
  if (position === null) return null;
  if (position.length !== 3 * points) {
    faults.add('length', `${name} Points`, `got ${position.length} numbers, expected ${3 * points}`);
  }
  const children = (element: Element | undefined): Element[] =>
    element?.children.filter((child) => child.name === 'DataArray' || child.name === 'Array') ?? [];
  return {
    file,
    points,
    position,
    pointData: children(childOf(piece, 'PointData')),
    cellData: children(childOf(piece, 'CellData')),
    fieldData: [...children(childOf(data, 'FieldData')), ...children(childOf(piece, 'FieldData'))],
    count,
    read,
  };
}
