import { InputError } from '../../core/errors.ts';
import { decodeText } from '../../core/text.ts';
import type { Quantity } from '../../core/units.ts';
import type { TreeRecord } from '../../tree/forest.ts';
import { assembleTree } from '../assemble.ts';
import { FaultList } from '../faults.ts';
import type { DecodedTree, EncodedFile, NamedBytes, TreeFormat } from '../format.ts';
import { columnName, NODE_COLUMNS, type NodeKey, TERRITORY, VESSEL_COLUMNS, type VesselKey } from '../quantities.ts';
import { columnToSi, printReal, unitOfName } from '../text/numbers.ts';
import { TextWriter } from '../text/writer.ts';

const FORMAT_VERSION = 1;

function encodeJson(record: TreeRecord): EncodedFile[] {
  const { forest, field, order, territory } = record;
  const out = new TextWriter();
  const list = (name: string, value: (row: number) => number, roots: boolean, last = false) => {
    out.add(`    "${name}": [`);
    let comma = '';
    for (let i = 0; i < forest.count; i++) {
      if (!roots && forest.parent[i]! < 0) continue;
      out.add(`${comma}${printReal(value(i))}`);
      comma = ',';
    }
    out.add(last ? ']\n' : '],\n');
  };
  const trees = record.names.map((name, t) => `{ "name": ${JSON.stringify(name)}, "kind": "${record.kinds[t]}" }`);
  out.add(`{\n  "format_version": ${FORMAT_VERSION},\n  "trees": [${trees.join(', ')}],\n  "nodes": {\n`);
  if (field !== null) for (const column of NODE_COLUMNS) list(columnName(column), (i) => field[column.key][i]!, true);
  for (let k = 0; k < 3; k++) list(`${'xyz'[k]}_m`, (i) => forest.position[3 * i + k]!, true, k === 2);
  out.add('  },\n  "vessels": {\n');
  list('tree', (i) => forest.tree[i]!, false);
  list('from', (i) => forest.parent[i]!, false);
  list('to', (i) => i, false);
  list('radius_m', (i) => forest.radius[i]!, false);
  list('flow_m3_s', (i) => forest.flow[i]!, false);
  if (field !== null)
    for (const column of VESSEL_COLUMNS) list(columnName(column), (i) => field[column.key][i]!, false);
  if (territory) list(TERRITORY, (i) => territory[i]!, false);
  list('order', (i) => order[i]!, false, true);
  out.add(`  },\n  "provenance": ${JSON.stringify(record.provenance)}\n}\n`);
  return [{ suffix: '.json', bytes: out.bytes() }];
}

type Columns = Readonly<Record<string, unknown>>;

function decodeJson(files: readonly NamedBytes[]): DecodedTree {
  const { name, bytes } = files[0]!;
  const faults = new FaultList();
  const whole = parse(bytes, name);
  const section = (key: string): Columns => {
    const value = isObject(whole) ? whole[key] : undefined;
    if (isObject(value)) return value;
    faults.add('missing', `${name} ${key}`, `got ${describe(value)}, expected an object of columns`);
    return {};
  };
  if (isObject(whole) && (whole.format_version ?? FORMAT_VERSION) !== FORMAT_VERSION) {
    faults.add('format-version', `${name} format_version`, `got ${describe(whole.format_version)}, expected 1`);
  }
  const nodes = section('nodes');
  const vessels = section('vessels');
  faults.throwIfAny();
  const read = (at: string, columns: Columns, base: string, quantity: Quantity | null, needed = false) =>
    readColumn(name, at, columns, base, quantity, needed, faults);
  const axes = ['x', 'y', 'z'].map((axis) => read('nodes', nodes, axis, 'length', true));
  const from = read('vessels', vessels, 'from', null, true);
  const to = read('vessels', vessels, 'to', null, true);
  const radius = read('vessels', vessels, 'radius', 'length', true);
  const flow = read('vessels', vessels, 'flow', 'flow');
  const tree = read('vessels', vessels, 'tree', null);
  const order = read('vessels', vessels, 'order', null);
  const territory = read('vessels', vessels, TERRITORY, null);
  const vesselField: Partial<Record<VesselKey, Float64Array>> = {};
  for (const column of VESSEL_COLUMNS) {
    const values = read('vessels', vessels, column.base, column.quantity);
    if (values !== null) vesselField[column.key] = values;
  }
  const nodeField: Partial<Record<NodeKey, Float64Array>> = {};
  for (const column of NODE_COLUMNS) {
    const values = read('nodes', nodes, column.base, column.quantity);
    if (values !== null) nodeField[column.key] = values;
  }
  faults.throwIfAny();
  const count = axes[0]!.length;
  const length = from!.length;
  const same = (at: string, expected: number, list: readonly (Float64Array | null | undefined)[]) => {
    for (const values of list) {
      if (values !== null && values !== undefined && values.length !== expected) {
        faults.add(
          'length',
          `${name} ${at}`,
          `got columns of ${values.length} and of ${expected} values, expected one length`,
        );
      }
    }
  };
  same('nodes', count, [...axes, ...Object.values(nodeField)]);
  same('vessels', length, [to, radius, flow, tree, order, territory, ...Object.values(vesselField)]);
  const ends = (values: Float64Array, what: string): Int32Array => {
    const rows = new Int32Array(values);
    for (let v = 0; v < values.length; v++) {
      const node = values[v]!;
      if (Number.isInteger(node) && node >= 0 && node < count) continue;
      faults.add('no-node', `${name} vessels.${what}[${v}]`, `got ${node}, expected a node from 0 to ${count - 1}`);
    }
    return rows;
  };
  const fromRow = ends(from!, 'from');
  const toRow = ends(to!, 'to');
  const position = new Float64Array(3 * count);
  for (let i = 0; i < count; i++) for (let k = 0; k < 3; k++) position[3 * i + k] = axes[k]![i]!;
  const list = isObject(whole) && Array.isArray(whole.trees) ? whole.trees : null;
  const textsOf = (key: string): string[] | null =>
    list?.map((item) => String(isObject(item) ? item[key] : item)) ?? null;
  const provenance = isObject(whole) && typeof whole.provenance === 'string' ? whole.provenance : null;
  faults.throwIfAny();
  return assembleTree(
    {
      where: name,
      nodes: count,
      vessels: length,
      position,
      from: fromRow,
      to: toRow,
      radius: radius!,
      flow,
      tree: tree === null ? null : new Int32Array(tree),
      order: order === null ? null : new Int32Array(order),
      vesselField,
      nodeField,
      territory,
      names: textsOf('name'),
      kinds: textsOf('kind'),
      provenance,
      nameNode: (node) => `${name} nodes[${node}]`,
      nameVessel: (vessel) => `${name} vessels[${vessel}]`,
    },
    faults,
    [],
  );
}

function parse(bytes: Uint8Array, name: string): unknown {
  try {
    return JSON.parse(decodeText(bytes));
  } catch (error) {
    // Both a text that is no JSON and one too long for this engine's strings end here.
    const message = error instanceof Error ? error.message : String(error);
    throw new InputError([{ code: 'json', where: name, message: `got ${message}, expected a JSON document` }]);
  }
}

function isObject(value: unknown): value is Columns {
  return typeof value === 'object' && value !== null && !Array.isArray(value);
}

function describe(value: unknown): string {
  return value === undefined
    ? 'nothing'
    : Array.isArray(value)
      ? 'a list'
      : (JSON.stringify(value)?.slice(0, 40) ?? '?');
}

function readColumn(
  file: string,
  at: string,
  columns: Columns,
  base: string,
  quantity: Quantity | null,
  needed: boolean,
  faults: FaultList,
): Float64Array | null {
  for (const name of Object.keys(columns)) {
    const unit = quantity === null ? null : unitOfName(name, base, quantity);
    if (quantity === null ? name !== base : unit === null) continue;
    const value = columns[name];
    if (!Array.isArray(value)) {
      faults.add('type', `${file} ${at}.${name}`, `got ${describe(value)}, expected a list of numbers`);
      return null;
    }
    const values = new Float64Array(value.length);
    for (let i = 0; i < value.length; i++) {
      if (typeof value[i] !== 'number') {
        faults.add('number', `${file} ${at}.${name}[${i}]`, `got ${describe(value[i])}, expected a number`);
      }
      values[i] = Number(value[i]);
    }
    if (unit !== null) columnToSi(values, unit);
    return values;
  }
  if (needed) {
    const wanted = quantity === null ? base : `${base} with a unit of ${quantity}`;
    faults.add(
      'missing',
      `${file} ${at}`,
      `got columns ${Object.keys(columns).join(', ')}, expected one named ${wanted}`,
    );
  }
  return null;
}

export const JSON_TREE: TreeFormat = {
  id: 'json',
  title: 'one JSON document of columns: trees, nodes, vessels, provenance',
  extensions: ['.json'],
  parts: ['.json'],
  units: 'SI; the unit is in each key',
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
  encode: encodeJson,
  decode: decodeJson,
};
