import type { FlowField, TreeKind } from '../tree/forest.ts';
import { freezeForest } from '../tree/freeze.ts';
import { strahlerOrders } from '../tree/strahler.ts';
import type { FaultList } from './faults.ts';
import type { DecodedTree } from './format.ts';
import { columnName, NODE_COLUMNS, type NodeKey, TERRITORY, VESSEL_COLUMNS, type VesselKey } from './quantities.ts';
import { keepRows, type Placed } from './row-order.ts';

/** Nodes and vessels as some file listed them: in any order, unchecked but for the length of columns. */
export interface LooseTree {
  /** The file, for faults of the whole. */
  readonly where: string;
  readonly nodes: number;
  readonly vessels: number;
  /** (3 nodes) m */
  readonly position: Float64Array;
  /** (vessels) node at the end nearer the root. */
  readonly from: Int32Array;
  /** (vessels) node at the far end. */
  readonly to: Int32Array;
  /** (vessels) m */
  readonly radius: Float64Array;
  /** (vessels) m³/s, or null: not in the file. */
  readonly flow: Float64Array | null;
  /** (vessels) index of its tree. */
  readonly tree: Int32Array | null;
  /** (vessels) Strahler order. */
  readonly order: Int32Array | null;
  /** Taken over: columns are dropped once they stand in the record. */
  readonly vesselField: Partial<Record<VesselKey, Float64Array>>;
  readonly nodeField: Partial<Record<NodeKey, Float64Array>>;
  /** (vessels) m³ that each terminal serves, or null: not in the file. */
  readonly territory: Float64Array | null;
  readonly names: readonly string[] | null;
  readonly kinds: readonly string[] | null;
  readonly provenance: string | null;
  /** Name of a node or vessel in messages, e.g. `tree.nodes.csv:7`. */
  nameNode(node: number): string;
  nameVessel(vessel: number): string;
}

/**
 * Makes a checked record of nodes and vessels in any order: one place for every decoder, so that a broken tree is
 * refused alike whatever it came in.
 *
 * Supplied where the file lacks it, and noted: flow (one unit a terminal), kinds, names. A root with several vessels
 * becomes several trees, since a tree has one root vessel. Orders that the file lacks are computed without a note.
 *
 * @throws InputError with every fault found: ends that do not exist, a node with two vessels into it, a ring, a value that
 *         is not finite or not positive, a vessel without length
 * @param loose its columns become the record's where they can, and must not be used again
 * Cost: O(nodes + vessels); nodes and vessels that stand in the order of a forest's rows, as we write them, are not moved.
 */
export function assembleTree(loose: LooseTree, faults: FaultList, notes: string[]): DecodedTree {
  checkValues(loose, faults);
  faults.throwIfAny();
  const placed = keepRows(loose) ?? placeRows(loose, faults, notes);
  const { forest } = placed;
  const { names, kinds } = nameTrees(loose, forest.treeStart.length - 1, faults, notes);
  faults.throwIfAny();
  const order =
    loose.order === null ? strahlerOrders(forest) : placed.ofVessels(loose.order, new Int32Array(forest.count));
  const field = buildField(loose, placed, notes);
  const { provenance } = loose;
  if (loose.territory === null) return { record: { forest, names, kinds, field, order, provenance }, notes };
  const territory = placed.ofVessels(loose.territory, new Float64Array(forest.count));
  return { record: { forest, names, kinds, field, order, territory, provenance }, notes };
}

/** The forest of nodes and vessels in any order. */
function placeRows(loose: LooseTree, faults: FaultList, notes: string[]): Placed {
  const into = vesselInto(loose, faults);
  faults.throwIfAny();
  const { rootNode, rootVessel } = listTrees(loose, into, faults, notes);
  faults.throwIfAny();

  // Loose rows: the nodes, then a copy of a root node for every tree after the first that starts there.
  const trees = rootNode.length;
  const rows = loose.nodes + trees;
  const parent = new Int32Array(rows).fill(-1);
  const position = new Float64Array(3 * rows);
  position.set(loose.position);
  const radius = new Float64Array(rows);
  const flow = new Float64Array(rows);
  const roots = new Int32Array(trees);
  for (let v = 0; v < loose.vessels; v++) {
    const to = loose.to[v]!;
    parent[to] = loose.from[v]!;
    radius[to] = loose.radius[v]!;
    if (loose.flow !== null) flow[to] = loose.flow[v]!;
  }
  const taken = new Uint8Array(loose.nodes);
  for (let t = 0; t < trees; t++) {
    const node = rootNode[t]!;
    let row = node;
    if (taken[node] === 1) {
      row = loose.nodes + t;
      for (let k = 0; k < 3; k++) position[3 * row + k] = loose.position[3 * node + k]!;
    }
    taken[node] = 1;
    roots[t] = row;
    parent[loose.to[rootVessel[t]!]!] = row;
  }
  if (loose.flow === null) {
    countTerminals(loose, into, flow);
    notes.push(`${loose.where}: holds no flow; every terminal was given 1 m³/s, so flows are shares only`);
  }
  const { forest, source } = freezeForest({ count: rows, parent, position, radius, flow, roots });
  const vesselOfRow = new Int32Array(forest.count);
  const nodeOfRow = new Int32Array(forest.count);
  for (let i = 0; i < forest.count; i++) {
    const node = source[i]!;
    nodeOfRow[i] = node < loose.nodes ? node : rootNode[node - loose.nodes]!;
    const root = forest.parent[i]! < 0;
    vesselOfRow[i] = root ? rootVessel[forest.tree[i]!]! : into[node]!;
  }
  return {
    forest,
    ofVessels: (values, out) => gather(values, vesselOfRow, out),
    ofNodes: (values) => gather(values, nodeOfRow, new Float64Array(forest.count)),
  };
}

function gather<Column extends Float64Array | Int32Array>(values: Column, at: Int32Array, out: Column): Column {
  for (let i = 0; i < at.length; i++) out[i] = values[at[i]!]!;
  return out;
}

function checkValues(loose: LooseTree, faults: FaultList): void {
  if (loose.vessels === 0) faults.add('no-vessels', loose.where, 'got no vessels, expected at least one');
  for (let i = 0; i < loose.nodes; i++) {
    for (let k = 0; k < 3; k++) {
      const x = loose.position[3 * i + k]!;
      if (!Number.isFinite(x)) faults.add('not-finite', loose.nameNode(i), `got ${'xyz'[k]} ${x}, expected a number`);
    }
  }
  const p = loose.position;
  for (let v = 0; v < loose.vessels; v++) {
    const a = loose.from[v]!;
    const b = loose.to[v]!;
    const r = loose.radius[v]!;
    if (!(r > 0 && r < Infinity)) faults.add('radius', loose.nameVessel(v), `got radius ${r} m, expected > 0`);
    if (loose.flow !== null) {
      const q = loose.flow[v]!;
      if (!(q > 0 && q < Infinity)) faults.add('flow', loose.nameVessel(v), `got flow ${q} m³/s, expected > 0`);
    }
    if (loose.order !== null && !(loose.order[v]! >= 1)) {
      faults.add('order', loose.nameVessel(v), `got order ${loose.order[v]}, expected ≥ 1`);
    }
    if (!(a >= 0 && a < loose.nodes && b >= 0 && b < loose.nodes)) {
      faults.add('no-node', loose.nameVessel(v), `got ends ${a} and ${b}, expected nodes 0 to ${loose.nodes - 1}`);
    } else if (p[3 * a] === p[3 * b] && p[3 * a + 1] === p[3 * b + 1] && p[3 * a + 2] === p[3 * b + 2]) {
      faults.add('no-length', loose.nameVessel(v), 'got both ends at one place, expected a vessel with length');
    }
  }
  for (let v = 0; loose.territory !== null && v < loose.vessels; v++) {
    const size = loose.territory[v]!;
    if (size >= 0 && size < Infinity) continue;
    faults.add('territory', loose.nameVessel(v), `got ${TERRITORY} ${size}, expected a number of at least 0`);
  }
  for (const column of VESSEL_COLUMNS) {
    const values = loose.vesselField[column.key];
    if (values === undefined) continue;
    for (let v = 0; v < loose.vessels; v++) {
      if (!Number.isFinite(values[v]!)) {
        faults.add('not-finite', loose.nameVessel(v), `got ${columnName(column)} ${values[v]}, expected a number`);
      }
    }
  }
  for (const column of NODE_COLUMNS) {
    const values = loose.nodeField[column.key];
    if (values === undefined) continue;
    for (let i = 0; i < loose.nodes; i++) {
      if (!Number.isFinite(values[i]!)) {
        faults.add('not-finite', loose.nameNode(i), `got ${columnName(column)} ${values[i]}, expected a number`);
      }
    }
  }
}

/** (nodes) the vessel that ends at a node, or −1. Lists nodes with two, and rings. */
function vesselInto(loose: LooseTree, faults: FaultList): Int32Array {
  const into = new Int32Array(loose.nodes).fill(-1);
  for (let v = 0; v < loose.vessels; v++) {
    const to = loose.to[v]!;
    if (into[to]! >= 0) {
      faults.add(
        'two-parents',
        loose.nameVessel(v),
        `ends where ${loose.nameVessel(into[to]!)} ends too, expected one vessel into a node`,
      );
    } else into[to] = v;
  }
  // Walk towards the root from every node; a walk that meets its own mark has gone round a ring.
  const mark = new Int32Array(loose.nodes);
  for (let start = 0; start < loose.nodes; start++) {
    let node = start;
    while (mark[node] === 0) {
      mark[node] = start + 1;
      const vessel = into[node]!;
      if (vessel < 0) break;
      node = loose.from[vessel]!;
      if (mark[node] === start + 1) {
        faults.add('ring', loose.nameVessel(vessel), 'lies on a ring, expected a tree');
        break;
      }
    }
  }
  return into;
}

/** Root node and root vessel of every tree, in the order of the file's tree indices, else of root nodes and vessels. */
function listTrees(
  loose: LooseTree,
  into: Int32Array,
  faults: FaultList,
  notes: string[],
): { rootNode: Int32Array; rootVessel: Int32Array } {
  const starts: number[] = [];
  const used = new Uint8Array(loose.nodes);
  const vesselsOut = new Int32Array(loose.nodes);
  for (let v = 0; v < loose.vessels; v++) {
    const from = loose.from[v]!;
    used[from] = 1;
    used[loose.to[v]!] = 1;
    if (into[from]! < 0) {
      starts.push(v);
      vesselsOut[from]!++;
    } else if (loose.tree !== null && loose.tree[v] !== loose.tree[into[from]!]) {
      const above = into[from]!;
      faults.add(
        'tree-index',
        loose.nameVessel(v),
        `got tree ${loose.tree[v]}, expected ${loose.tree[above]} as of ${loose.nameVessel(above)}, on which it hangs`,
      );
    }
  }
  let idle = 0;
  let split = 0;
  for (let i = 0; i < loose.nodes; i++) {
    if (used[i] === 0) idle++;
    if (vesselsOut[i]! > 1) split++;
  }
  if (idle > 0) notes.push(`${loose.where}: ${idle} nodes belong to no vessel and were left out`);
  if (split > 0) {
    notes.push(
      `${loose.where}: ${split} roots had several vessels; each of those vessels now starts a tree of its own`,
    );
  }
  const index = loose.tree;
  const distinct = index !== null && new Set(starts.map((v) => index[v]!)).size === starts.length;
  if (index !== null && !distinct) notes.push(`${loose.where}: trees that shared an index were numbered anew`);
  starts.sort((a, b) => (distinct ? index[a]! - index[b]! : loose.from[a]! - loose.from[b]!) || a - b);
  return { rootNode: Int32Array.from(starts, (v) => loose.from[v]!), rootVessel: Int32Array.from(starts) };
}

/** Writes the number of terminals beyond each node. */
function countTerminals(loose: LooseTree, into: Int32Array, count: Float64Array): void {
  const open = new Int32Array(loose.nodes);
  for (let v = 0; v < loose.vessels; v++) open[loose.from[v]!]!++;
  for (let start = 0; start < loose.nodes; start++) {
    if (open[start]! !== 0 || into[start]! < 0) continue;
    count[start] = 1;
    // Climb while the node just served was the last open child of its parent.
    let node = start;
    for (let v = into[node]!; v >= 0; v = into[node]!) {
      const above = loose.from[v]!;
      count[above]! += count[node]!;
      open[above]!--;
      if (open[above]! > 0) break;
      open[above] = -1;
      node = above;
    }
  }
}

function nameTrees(
  loose: LooseTree,
  trees: number,
  faults: FaultList,
  notes: string[],
): { names: string[]; kinds: TreeKind[] } {
  const given = loose.names?.length === trees ? loose.names : null;
  const givenKinds = loose.kinds?.length === trees ? loose.kinds : null;
  const names = given === null ? Array.from({ length: trees }, (_, t) => `tree_${t}`) : given.slice();
  const kinds: TreeKind[] = [];
  const seen = new Set<string>();
  for (let t = 0; t < trees; t++) {
    const kind = givenKinds === null ? 'supply' : givenKinds[t]!;
    if (kind === 'supply' || kind === 'drain') kinds.push(kind);
    else faults.add('kind', loose.where, `got tree kind "${kind}", expected supply or drain`);
    if (!/^[A-Za-z][A-Za-z0-9_]*$/.test(names[t]!)) {
      faults.add('name', loose.where, `got tree name "${names[t]}", expected letters, digits and _, a letter first`);
    } else if (seen.has(names[t]!)) faults.add('name', loose.where, `got tree name ${names[t]} twice`);
    seen.add(names[t]!);
  }
  if (loose.names !== null && given === null) {
    notes.push(`${loose.where}: holds ${loose.names.length} tree names for ${trees} trees, which were named anew`);
  }
  if (givenKinds === null) notes.push(`${loose.where}: does not say which trees drain; all were taken as supply`);
  return { names, kinds };
}

function buildField(loose: LooseTree, placed: Placed, notes: string[]): FlowField | null {
  const { vesselField, nodeField } = loose;
  const missing = [
    ...VESSEL_COLUMNS.filter((column) => vesselField[column.key] === undefined),
    ...NODE_COLUMNS.filter((column) => nodeField[column.key] === undefined),
  ];
  const all = VESSEL_COLUMNS.length + NODE_COLUMNS.length;
  if (missing.length > 0) {
    if (missing.length < all) {
      const names = missing.map(columnName).join(', ');
      notes.push(`${loose.where}: its flow solution lacks ${names} and was left out; solve the flow again`);
    }
    return null;
  }
  const { forest } = placed;
  const vessel = (key: VesselKey) => {
    const values = vesselField[key]!;
    delete vesselField[key];
    return placed.ofVessels(values, new Float64Array(forest.count));
  };
  const node = (key: NodeKey) => {
    const values = nodeField[key]!;
    delete nodeField[key];
    return placed.ofNodes(values);
  };
  return {
    forest,
    pressure: node('pressure'),
    transit: node('transit'),
    viscosity: vessel('viscosity'),
    velocity: vessel('velocity'),
    wallShear: vessel('wallShear'),
    reynolds: vessel('reynolds'),
    haematocrit: vessel('haematocrit'),
  };
}
