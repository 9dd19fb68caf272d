import {
  type Cells,
  type DataSetParts,
  type EncodedDataSet,
  encodeDataSet,
  type NamedArray,
} from './data-set-writer.ts';

export type { NamedArray } from './data-set-writer.ts';

export interface PolyDataParts extends DataSetParts {
  readonly lines?: Cells;
  readonly polys?: Cells;
}

/** A VTK XML PolyData file of lines and polygons. */
export function encodePolyData(parts: PolyDataParts): EncodedDataSet {
  return encodeDataSet(
    {
      type: 'PolyData',
      counts: {
        NumberOfVerts: 0,
        NumberOfLines: parts.lines?.ends.length ?? 0,
        NumberOfStrips: 0,
        NumberOfPolys: parts.polys?.ends.length ?? 0,
      },
      cells: { Lines: cellArrays(parts.lines), Polys: cellArrays(parts.polys) },
    },
    parts,
  );
}

function cellArrays(list: Cells | undefined): NamedArray[] {
  if (list === undefined) return [];
  return [
    { name: 'connectivity', values: list.connectivity },
    { name: 'offsets', values: list.ends },
  ];
}
