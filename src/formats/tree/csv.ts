import type { Quantity } from '../../core/units.ts';
import type { TreeRecord } from '../../tree/forest.ts';
import { assembleTree } from '../assemble.ts';
import { FaultList } from '../faults.ts';
import type { DecodedTree, EncodedFile, NamedBytes, TreeFormat } from '../format.ts';
import { columnName, NODE_COLUMNS, type NodeKey, TERRITORY, VESSEL_COLUMNS, type VesselKey } from '../quantities.ts';
import { columnToSi, printReal, unitOfName } from '../text/numbers.ts';
import { readTable, type Table } from '../text/table.ts';
import { TextWriter } from '../text/writer.ts';

function encodeCsv(record: TreeRecord): EncodedFile[] {
  const { forest, field, order, territory } = record;
  const nodes = new TextWriter();
  const vessels = new TextWriter();
  const nodeFields = field === null ? [] : NODE_COLUMNS;
  const vesselFields = field === null ? [] : VESSEL_COLUMNS;
  nodes.add(`${['node', 'tree', 'x_m', 'y_m', 'z_m', ...nodeFields.map(columnName)].join(',')}\n`);
  const head = ['vessel', 'tree', 'tree_name', 'kind', 'from', 'to', 'radius_m', 'flow_m3_s', 'order'];
  vessels.add(`${[...head, ...vesselFields.map(columnName), ...(territory ? [TERRITORY] : [])].join(',')}\n`);
  for (let i = 0, v = 0; i < forest.count; i++) {
    const p = forest.position;
    const t = forest.tree[i]!;
    let row = `${i},${t},${printReal(p[3 * i]!)},${printReal(p[3 * i + 1]!)},${printReal(p[3 * i + 2]!)}`;
    for (const column of nodeFields) row += `,${printReal(field![column.key][i]!)}`;
    nodes.add(`${row}\n`);
    if (forest.parent[i]! < 0) continue;
    row = `${v++},${t},${record.names[t]},${record.kinds[t]},${forest.parent[i]},${i},${forest.radius[i]},${forest.flow[i]},${order[i]}`;
    for (const column of vesselFields) row += `,${printReal(field![column.key][i]!)}`;
    if (territory) row += `,${printReal(territory[i]!)}`;
    vessels.add(`${row}\n`);
  }
  return [
    { suffix: '.nodes.csv', bytes: nodes.bytes() },
    { suffix: '.vessels.csv', bytes: vessels.bytes() },
  ];
}

const NODE_READ: readonly (readonly [string, Quantity | null])[] = [
  ['node', null],
  ['x', 'length'],
  ['y', 'length'],
  ['z', 'length'],
  ...NODE_COLUMNS.map((column) => [column.base, column.quantity] as const),
];
const VESSEL_READ: readonly (readonly [string, Quantity | null])[] = [
  ['tree', null],
  ['from', null],
  ['to', null],
  ['radius', 'length'],
  ['flow', 'flow'],
  ['order', null],
  [TERRITORY, null],
  ...VESSEL_COLUMNS.map((column) => [column.base, column.quantity] as const),
];

function decodeCsv(files: readonly NamedBytes[]): DecodedTree {
  const faults = new FaultList();
  const [nodeFile, vesselFile] = [files[0]!, files[1]!];
  const reading = (list: typeof NODE_READ) => (name: string) =>
    list.some(([base, quantity]) => (quantity === null ? name === base : unitOfName(name, base, quantity) !== null))
      ? ('real' as const)
      : name === 'tree_name' || name === 'kind'
        ? ('text' as const)
        : null;
  const nodes = readTable(nodeFile.bytes, nodeFile.name, reading(NODE_READ), faults);
  const vessels = readTable(vesselFile.bytes, vesselFile.name, reading(VESSEL_READ), faults);
  faults.throwIfAny();
  const [x, y, z] = ['x', 'y', 'z'].map((axis) => column(nodes!, axis, 'length', true, faults));
  const from = column(vessels!, 'from', null, true, faults);
  const to = column(vessels!, 'to', null, true, faults);
  const radius = column(vessels!, 'radius', 'length', true, faults);
  faults.throwIfAny();
  const position = new Float64Array(3 * nodes!.rows);
  for (let i = 0; i < nodes!.rows; i++) {
    position[3 * i] = x![i]!;
    position[3 * i + 1] = y![i]!;
    position[3 * i + 2] = z![i]!;
  }
  const rowOf = numberNodes(nodes!, faults);
  const place = (ends: Float64Array, what: string): Int32Array =>
    Int32Array.from(ends, (id, v) => {
      const row = rowOf(id);
      if (row < 0)
        faults.add('no-node', `${vesselFile.name}:${vessels!.line[v]}`, `got ${what} ${id}, expected a node`);
      return row;
    });
  const fromRow = place(from!, 'from');
  const toRow = place(to!, 'to');
  faults.throwIfAny();
  const whole = (base: string): Int32Array | null => {
    const values = column(vessels!, base, null, false, faults);
    return values === null ? null : new Int32Array(values);
  };
  const vesselField: Partial<Record<VesselKey, Float64Array>> = {};
  for (const spec of VESSEL_COLUMNS) {
    const values = column(vessels!, spec.base, spec.quantity, false, faults);
    if (values !== null) vesselField[spec.key] = values;
  }
  const nodeField: Partial<Record<NodeKey, Float64Array>> = {};
  for (const spec of NODE_COLUMNS) {
    const values = column(nodes!, spec.base, spec.quantity, false, faults);
    if (values !== null) nodeField[spec.key] = values;
  }
  const tree = whole('tree');
  return assembleTree(
    {
      where: vesselFile.name,
      nodes: nodes!.rows,
      vessels: vessels!.rows,
      position,
      from: fromRow,
      to: toRow,
      radius: radius!,
      flow: column(vessels!, 'flow', 'flow', false, faults),
      tree,
      order: whole('order'),
      vesselField,
      nodeField,
      territory: column(vessels!, TERRITORY, null, false, faults),
      names: textByTree(vessels!, 'tree_name', tree),
      kinds: textByTree(vessels!, 'kind', tree),
      provenance: null,
      nameNode: (node) => `${nodeFile.name}:${nodes!.line[node]}`,
      nameVessel: (vessel) => `${vesselFile.name}:${vessels!.line[vessel]}`,
    },
    faults,
    [],
  );
}

/** A column in SI, found by the base of its name. */
function column(
  table: Table,
  base: string,
  quantity: Quantity | null,
  needed: boolean,
  faults: FaultList,
): Float64Array | null {
  for (const name of table.header) {
    const unit = quantity === null ? null : unitOfName(name, base, quantity);
    if (quantity === null ? name !== base : unit === null) continue;
    const values = table.reals.get(name)!;
    if (unit !== null) columnToSi(values, unit);
    return values;
  }
  if (needed) {
    const wanted = quantity === null ? base : `${base} with a unit of ${quantity}`;
    faults.add('missing', `${table.name}:1`, `got columns ${table.header.join(', ')}, expected one named ${wanted}`);
  }
  return null;
}

/** Row of a node's number. */
function numberNodes(nodes: Table, faults: FaultList): (id: number) => number {
  const ids = nodes.reals.get('node');
  const count = nodes.rows;
  if (ids === undefined || ids.every((id, i) => id === i)) {
    return (id) => (Number.isInteger(id) && id >= 0 && id < count ? id : -1);
  }
  const rows = new Map<number, number>();
  for (let i = 0; i < count; i++) {
    if (rows.has(ids[i]!)) faults.add('node', `${nodes.name}:${nodes.line[i]}`, `got node ${ids[i]} twice`);
    rows.set(ids[i]!, i);
  }
  return (id) => rows.get(id) ?? -1;
}

/** Text of each tree, in the order of tree indices; null where the table does not say it for all. */
function textByTree(vessels: Table, name: string, tree: Int32Array | null): string[] | null {
  const values = vessels.texts.get(name);
  if (values === undefined || tree === null) return null;
  const first = new Map<number, string>();
  for (let v = 0; v < vessels.rows; v++) if (!first.has(tree[v]!)) first.set(tree[v]!, values[v]!);
  return [...first.keys()].sort((a, b) => a - b).map((t) => first.get(t)!);
}

export const CSV: TreeFormat = {
  id: 'csv',
  title: 'two comma-separated tables with a header: NAME.nodes.csv and NAME.vessels.csv; NAME.csv stands for both',
  extensions: ['.csv'],
  parts: ['.nodes.csv', '.vessels.csv'],
  units: 'SI; the unit is in each column name',
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
  ],
  drops: ['provenance'],
  encode: encodeCsv,
  decode: decodeCsv,
};
