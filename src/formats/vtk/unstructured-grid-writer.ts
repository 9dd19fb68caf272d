import { LINE } from './cell-types.ts';
import {
  type Cells,
  type DataSetParts,
  type EncodedDataSet,
  encodeDataSet,
  joinTexts,
  type NamedArray,
} from './data-set-writer.ts';

export interface LineGridParts extends DataSetParts {
  /** Lines of two points. */
  readonly lines: Cells;
}

/**
 * A VTK XML UnstructuredGrid file of lines.
 *
 * Texts are written as UInt8 codes, each text ended by a 0: not every reader of these files knows arrays of text, and
 * meshio 5 refuses a whole file for one.
 */
export function encodeLineGrid(parts: LineGridParts): EncodedDataSet {
  const { connectivity, ends } = parts.lines;
  return encodeDataSet(
    {
      type: 'UnstructuredGrid',
      counts: { NumberOfCells: ends.length },
      cells: {
        Cells: [
          { name: 'connectivity', values: connectivity },
          { name: 'offsets', values: ends },
          { name: 'types', values: new Uint8Array(ends.length).fill(LINE) },
        ],
      },
    },
    {
      points: parts.points,
      pointData: parts.pointData.map(asNumbers),
      cellData: parts.cellData.map(asNumbers),
      fieldData: parts.fieldData.map(asNumbers),
    },
  );
}

function asNumbers(array: NamedArray): NamedArray {
  return 'texts' in array ? { name: array.name, values: joinTexts(array.texts) } : array;
}
