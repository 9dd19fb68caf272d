import type { TreeFormat } from '../format.ts';
import { openLineGrid } from '../vtk/unstructured-grid-reader.ts';
import { encodeLineGrid } from '../vtk/unstructured-grid-writer.ts';
import { inPieces, treeAsLines, treeOfLines } from './vtk-tree.ts';

export const VTU: TreeFormat = {
  id: 'vtu',
  title: 'VTK XML UnstructuredGrid, otherwise as .vtp; texts as UInt8 codes, for readers that know no texts',
  extensions: ['.vtu'],
  parts: ['.vtu'],
  units: 'SI; the unit is in each array name',
  precision: 0,
  keeps: [
    'positions',
    'radii',
    'flows',
    'tree index',
    'tree names and kinds',
    'orders',
    'flow solution',
    'territories',
    'provenance',
  ],
  drops: [],
  encode: (record) => [inPieces('.vtu', encodeLineGrid(treeAsLines(record)))],
  decode: (files) => treeOfLines(files[0]!.name, files[0]!.bytes, openLineGrid),
  decodeSource: (source) => treeOfLines(source.name, source, openLineGrid),
};
