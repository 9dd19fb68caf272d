import type { Reals, Rows } from '../../core/reals.ts';
import type { Quantity } from '../../core/units.ts';
import type { Forest, TreeRecord } from '../../tree/forest.ts';
import { countVessels } from '../../tree/vessels.ts';
import { assembleTree } from '../assemble.ts';
import { FaultList } from '../faults.ts';
import type { ByteSource, DecodedTree, EncodedFile } from '../format.ts';
import { columnName, NODE_COLUMNS, type NodeKey, TERRITORY, VESSEL_COLUMNS, type VesselKey } from '../quantities.ts';
import { columnToSi, unitOfName } from '../text/numbers.ts';
import type { LineData } from '../vtk/data-set-reader.ts';
import {
  type Cells,
  type DataSetParts,
  type EncodedDataSet,
  joinPieces,
  type NamedArray,
} from '../vtk/data-set-writer.ts';
import type { Element } from '../vtk/xml.ts';

/** Raised when a file written by an older reader's rules could be misread. */
const FORMAT_VERSION = 1;

/**
 * A tree as the points, lines and arrays of a VTK data set: a point a node, a line a vessel, in the order of rows. Columns
 * are not copied but cut up: a file of 2·10⁷ vessels takes no memory but its connectivity.
 *
 * Cost: O(vessels + trees)
 */
export function treeAsLines(record: TreeRecord): DataSetParts & { readonly lines: Cells } {
  const { forest, field } = record;
  const vessels = countVessels(forest);
  const connectivity = new Int32Array(2 * vessels);
  const ends = new Int32Array(vessels);
  for (let i = 0, v = 0; i < forest.count; i++) {
    if (forest.parent[i]! < 0) continue;
    connectivity[2 * v] = forest.parent[i]!;
    connectivity[2 * v + 1] = i;
    ends[v] = 2 * v + 2;
    v++;
  }
  const ofVessels = (name: string, column: Reals | Rows): NamedArray => ({
    name,
    values: withoutRoots(forest, column),
  });
  const cellData: NamedArray[] = [
    ofVessels('radius_m', forest.radius),
    ofVessels('flow_m3_s', forest.flow),
    ofVessels('tree', forest.tree),
    ofVessels('order', record.order),
  ];
  if (record.territory) cellData.push(ofVessels(TERRITORY, record.territory));
  const pointData: NamedArray[] = [];
  if (field !== null) {
    for (const column of VESSEL_COLUMNS) cellData.push(ofVessels(columnName(column), field[column.key]));
    for (const column of NODE_COLUMNS) {
      pointData.push({ name: columnName(column), values: [field[column.key].subarray()] });
    }
  }
  const fieldData: NamedArray[] = [
    { name: 'format_version', values: Int32Array.of(FORMAT_VERSION) },
    { name: 'tree_names', texts: record.names },
    { name: 'tree_kinds', texts: record.kinds },
  ];
  if (record.provenance !== null) fieldData.push({ name: 'provenance', texts: [record.provenance] });
  return { points: forest.position.subarray(), lines: { connectivity, ends }, pointData, cellData, fieldData };
}

/** A column's runs of rows between the roots, which are the first rows of the trees. */
function withoutRoots(forest: Forest, column: Reals | Rows): (Float64Array | Int32Array)[] {
  const runs: (Float64Array | Int32Array)[] = [];
  for (let t = 0; t + 1 < forest.treeStart.length; t++) {
    runs.push(column.subarray(forest.treeStart[t]! + 1, forest.treeStart[t + 1]!));
  }
  return runs;
}

/** An encoded data set as a file. */
export function inPieces(suffix: string, encoded: EncodedDataSet): EncodedFile {
  return {
    suffix,
    pieces: encoded.pieces,
    get bytes() {
      return joinPieces(encoded);
    },
  };
}

/**
 * Makes a checked record of a VTK file's lines and arrays.
 *
 * @param open reads the kind of data set the file holds
 * @throws InputError naming every place that is broken
 */
export function treeOfLines(
  name: string,
  content: Uint8Array | ByteSource,
  open: (content: Uint8Array | ByteSource, name: string, faults: FaultList) => LineData | null,
): DecodedTree {
  const faults = new FaultList();
  const notes: string[] = [];
  const opened = open(content, name, faults);
  faults.throwIfAny();
  const data = opened!;
  const { from, to, cell } = splitLines(data, faults);
  faults.throwIfAny();
  const others = data.cells - data.lines;
  if (others > 0) notes.push(`${name}: left out cells that are no lines: ${others} of ${data.cells}`);
  const arrays = new ArrayFinder(data, faults, notes);
  const version = data.fieldData.find((array) => array.attributes.Name === 'format_version');
  const found = version === undefined ? undefined : data.file.numbers(version)?.[0];
  if (found !== undefined && found !== FORMAT_VERSION) {
    faults.add('format-version', `${name} format_version`, `got ${found}, expected ${FORMAT_VERSION}`);
  }
  const vessels = from.length;
  // Loops, because TypedArray.from with a function goes through a list of boxed values.
  const plain = isCounting(cell, data.cells);
  const spread = (values: Float64Array | null): Float64Array | null =>
    values === null || plain ? values : gather(values, cell, new Float64Array(vessels));
  const whole = (values: Float64Array | Int32Array | null): Int32Array | null => {
    if (values === null || (plain && values instanceof Int32Array)) return values as Int32Array | null;
    return gather(values, cell, new Int32Array(vessels));
  };
  let radius = spread(arrays.cell('radius', 'length'));
  if (radius === null) {
    const ofPoint = arrays.point('radius', 'length');
    if (ofPoint === null) faults.add('missing', `${name} CellData`, 'got no array radius_m, expected one');
    else {
      radius = gather(ofPoint, to, new Float64Array(vessels));
      notes.push(`${name}: radii are of points; each vessel was given that of its far end`);
    }
  }
  const vesselField: Partial<Record<VesselKey, Float64Array>> = {};
  for (const column of VESSEL_COLUMNS) {
    const values = spread(arrays.cell(column.base, column.quantity));
    if (values !== null) vesselField[column.key] = values;
  }
  const nodeField: Partial<Record<NodeKey, Float64Array>> = {};
  for (const column of NODE_COLUMNS) {
    const values = arrays.point(column.base, column.quantity);
    if (values !== null) nodeField[column.key] = values;
  }
  const flow = spread(arrays.cell('flow', 'flow'));
  const territory = spread(arrays.cell(TERRITORY, null));
  const tree = whole(arrays.cellIndices('tree'));
  const order = whole(arrays.cellIndices('order'));
  const texts = (of: string): string[] | null => {
    const array = data.fieldData.find((element) => element.attributes.Name === of);
    return array === undefined ? null : data.file.texts(array);
  };
  const names = texts('tree_names');
  const kinds = texts('tree_kinds');
  const provenance = texts('provenance')?.[0] ?? null;
  faults.throwIfAny();
  return assembleTree(
    {
      where: name,
      nodes: data.points,
      vessels,
      position: data.position,
      from,
      to,
      radius: radius!,
      flow,
      tree,
      order,
      vesselField,
      nodeField,
      territory,
      names,
      kinds,
      provenance,
      nameNode: (node) => `${name} point ${node}`,
      nameVessel: (vessel) => `${name} cell ${cell[vessel]}`,
    },
    faults,
    notes,
  );
}

/** Whether indices are 0, 1, 2, … up to a count. */
function isCounting(at: Int32Array, count: number): boolean {
  if (at.length !== count) return false;
  for (let i = 0; i < count; i++) if (at[i] !== i) return false;
  return true;
}

function gather<Column extends Float64Array | Int32Array>(
  values: ArrayLike<number>,
  at: Int32Array,
  out: Column,
): Column {
  for (let i = 0; i < at.length; i++) out[i] = values[at[i]!]!;
  return out;
}

/** Vessels of lines: a line of k points is k − 1 vessels, each of the line's cell. */
function splitLines(data: LineData, faults: FaultList): { from: Int32Array; to: Int32Array; cell: Int32Array } {
  const { connectivity, ends, file } = data;
  let vessels = 0;
  let start = 0;
  for (let l = 0; l < data.lines; l++) {
    const end = ends[l]!;
    if (!(Number.isInteger(end) && end >= start + 2 && end <= connectivity.length)) {
      faults.add(
        'line',
        `${file.name} cell ${data.cell[l]}`,
        `runs over indices ${start} to ${end} of ${connectivity.length}, expected two points or more`,
      );
      return { from: new Int32Array(0), to: new Int32Array(0), cell: new Int32Array(0) };
    }
    vessels += end - start - 1;
    start = end;
  }
  const from = new Int32Array(vessels);
  const to = new Int32Array(vessels);
  const cell = new Int32Array(vessels);
  for (let l = 0, v = 0, at = 0; l < data.lines; l++) {
    for (const end = ends[l]!; at < end; at++) {
      const point = connectivity[at]!;
      if (!(Number.isInteger(point) && point >= 0 && point < data.points)) {
        faults.add(
          'no-node',
          `${file.name} cell ${data.cell[l]}`,
          `got point ${point}, expected 0 to ${data.points - 1}`,
        );
        continue;
      }
      if (at > (l === 0 ? 0 : ends[l - 1]!)) {
        from[v] = connectivity[at - 1]!;
        to[v] = point;
        cell[v] = data.cell[l]!;
        v++;
      }
    }
  }
  return { from, to, cell };
}

/** Finds arrays by the base of their name, in SI whatever unit the rest of the name states. */
class ArrayFinder {
  readonly #data: LineData;
  readonly #faults: FaultList;
  readonly #notes: string[];

  constructor(data: LineData, faults: FaultList, notes: string[]) {
    this.#data = data;
    this.#faults = faults;
    this.#notes = notes;
  }

  /** (cells) or null where there is no such array or it is broken. */
  cell(base: string, quantity: Quantity | null): Float64Array | null {
    return this.#find(this.#data.cellData, this.#data.cells, base, quantity);
  }

  /** (cells) or null, of an array that has no unit. */
  cellIndices(name: string): Float64Array | Int32Array | null {
    const { cellData, cells, file } = this.#data;
    const array = cellData.find((element) => element.attributes.Name === name);
    return array === undefined ? null : this.#counted(file.indices(array), cells, name);
  }

  /** (points) or null. */
  point(base: string, quantity: Quantity | null): Float64Array | null {
    return this.#find(this.#data.pointData, this.#data.points, base, quantity);
  }

  #find(list: readonly Element[], count: number, base: string, quantity: Quantity | null): Float64Array | null {
    const { file } = this.#data;
    for (const array of list) {
      const name = array.attributes.Name ?? '';
      const unit = quantity === null ? null : unitOfName(name, base, quantity);
      if (name !== base && unit === null) continue;
      const values = this.#counted(file.numbers(array), count, name);
      if (values === null) return null;
      if (unit !== null) columnToSi(values, unit);
      else if (quantity !== null) {
        this.#notes.push(`${file.name}: array ${name} states no unit and was taken in SI`);
      }
      return values;
    }
    return null;
  }

  /** The values, or null and a fault where there are not as many as there should be. */
  #counted<Column extends Float64Array | Int32Array>(
    values: Column | null,
    count: number,
    name: string,
  ): Column | null {
    if (values === null || values.length === count) return values;
    const { file } = this.#data;
    this.#faults.add('length', `${file.name} ${name}`, `got ${values.length} numbers, expected ${count}`);
    return null;
  }
}
