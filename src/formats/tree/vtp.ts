import type { TreeFormat } from '../format.ts';
import { openPolyData } from '../vtk/poly-data-reader.ts';
import { encodePolyData } from '../vtk/poly-data-writer.ts';
import { inPieces, treeAsLines, treeOfLines } from './vtk-tree.ts';

export const VTP: TreeFormat = {
  id: 'vtp',
  title: 'VTK XML PolyData, appended raw, float64: lines with cell, point and field data',
  extensions: ['.vtp'],
  parts: ['.vtp'],
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
  encode: (record) => [inPieces('.vtp', encodePolyData(treeAsLines(record)))],
  decode: (files) => treeOfLines(files[0]!.name, files[0]!.bytes, openPolyData),
  decodeSource: (source) => treeOfLines(source.name, source, openPolyData),
};
