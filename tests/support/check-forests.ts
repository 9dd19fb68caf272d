import type { Spec } from '../../src/spec/types.ts';
import type { TreeRecord } from '../../src/tree/forest.ts';

/** Columns of a record that a test may spoil. */
export interface Spoilable {
  parent: Int32Array;
  position: Float64Array;
  radius: Float64Array;
  flow: Float64Array;
  order: Int32Array;
  pressure: Float64Array;
  transit: Float64Array;
  viscosity: Float64Array;
  velocity: Float64Array;
  wallShear: Float64Array;
  reynolds: Float64Array;
}

/** A node of a hand-made tree: parent's index, position in mm, and, for terminals, the share of the flow. */
export interface HandNode {
  readonly parent: number;
  readonly at: readonly [number, number, number];
  readonly share?: number;
}

/**
 * Two levels of junctions and a bend in a 20 mm cube; the root sits on the face x = 0. Preorder. Rows and vessels:
 * 0 root, 1 (vessel 0) trunk, 2 (1) upper branch, 3 (2) bend, 4 and 5 (3, 4) its terminals, 6 (5) lower branch,
 * 7 and 8 (6, 7) its terminals.
 */
export const HAND_TREE: readonly HandNode[] = [
  { parent: -1, at: [0, 10, 10] },
  { parent: 0, at: [5, 10, 10] },
  { parent: 1, at: [8, 14, 10] },
  { parent: 2, at: [11, 15, 10] },
  { parent: 3, at: [14, 18, 12], share: 0.25 },
  { parent: 3, at: [15, 14, 8], share: 0.25 },
  { parent: 1, at: [9, 6, 10] },
  { parent: 6, at: [14, 6, 13], share: 0.25 },
  { parent: 6, at: [12, 2, 8], share: 0.25 },
];

/** A spec that the hand-made tree fulfils: least power, 3 mPa·s, 1 mL/min. */
export const HAND_SPEC: Spec = {
  name: 'hand-made',
  seed: '1',
  tissue: { shape: 'box', min: [0, 0, 0], max: [0.02, 0.02, 0.02] },
  forbidden: [],
  trees: [
    {
      name: 'supply',
      kind: 'supply',
      inlet: { position: [0, 0.01, 0.01], direction: [1, 0, 0], pressure: 8000, flow: 1e-6 / 60 },
      terminals: { by: 'count', count: 4, pressure: null },
    },
  ],
  blood: { viscosity: { law: 'constant', value: 0.003 }, density: 1060, maintenance: 600 },
  sizing: { rule: 'least-power' },
  clearance: { gap: 20e-6 },
  junctions: { minAngle: Math.PI / 6 },
  refine: 'none',
};

/**
 * A record of a hand-made tree with everything solved: flows from shares, radii by the given rule, field by the laws.
 *
 * @param radiusOf m, from the flow and the row
 * @param spoil    changes columns before the field is solved
 * @param spoilAll changes anything at the end
 */
export function buildRecord(
  nodes: readonly HandNode[],
  spec: Spec,
  radiusOf: (flow: number, row: number) => number = leastPowerRadius(spec),
  spoil: (columns: Spoilable) => void = () => {},
  spoilAll: (columns: Spoilable) => void = () => {},
): TreeRecord {
  const n = nodes.length;
  const columns: Spoilable = {
    parent: Int32Array.from(nodes, (node) => node.parent),
    position: Float64Array.from(nodes.flatMap((node) => node.at.map((x) => x / 1000))),
    radius: new Float64Array(n),
    flow: new Float64Array(n),
    order: new Int32Array(n),
    pressure: new Float64Array(n),
    transit: new Float64Array(n),
    viscosity: new Float64Array(n).fill(spec.blood.viscosity.value),
    velocity: new Float64Array(n),
    wallShear: new Float64Array(n),
    reynolds: new Float64Array(n),
  };
  const { parent, position, radius, flow, order } = columns;
  const roots = nodes.flatMap((node, row) => (node.parent < 0 ? [row] : []));
  const tree = new Int32Array(n);
  for (let i = 0; i < n; i++) tree[i] = parent[i]! < 0 ? roots.indexOf(i) : tree[parent[i]!]!;
  for (let i = n - 1; i >= 0; i--) {
    const share = nodes[i]!.share;
    if (share !== undefined) flow[i] = share * spec.trees[tree[i]!]!.inlet.flow;
    if (parent[i]! >= 0) flow[parent[i]!]! += flow[i]!;
    const under = nodes.flatMap((node, row) => (node.parent === i ? [order[row]!] : [])).sort((a, b) => b - a);
    order[i] = under.length === 0 ? 1 : under[0] === under[1] ? under[0]! + 1 : under[0]!;
  }
  for (let i = 0; i < n; i++) radius[i] = radiusOf(flow[i]!, i);
  spoil(columns);
  for (const root of roots) radius[root] = radius[root + 1]!;
  solve(columns, spec, tree);
  spoilAll(columns);
  const forest = { count: n, treeStart: Int32Array.from([...roots, n]), tree, parent, position, radius, flow };
  const { pressure, transit, viscosity, velocity, wallShear, reynolds } = columns;
  return {
    forest,
    kinds: spec.trees.map((asked) => asked.kind),
    names: spec.trees.map((asked) => asked.name),
    field: { forest, pressure, transit, viscosity, velocity, wallShear, reynolds, haematocrit: new Float64Array(n) },
    order,
    provenance: null,
  };
}

function solve(columns: Spoilable, spec: Spec, tree: Int32Array): void {
  const { parent, position, radius, flow } = columns;
  const mu = spec.blood.viscosity.value;
  for (let i = 0; i < parent.length; i++) {
    const asked = spec.trees[tree[i]!]!;
    const p = parent[i]!;
    const r = radius[i]!;
    const q = flow[i]!;
    columns.velocity[i] = q / (Math.PI * r * r);
    columns.wallShear[i] = (4 * mu * q) / (Math.PI * r * r * r);
    columns.reynolds[i] = (2 * spec.blood.density * q) / (Math.PI * r * mu);
    if (p < 0) {
      columns.pressure[i] = asked.inlet.pressure;
      continue;
    }
    const dx = position[3 * i]! - position[3 * p]!;
    const dy = position[3 * i + 1]! - position[3 * p + 1]!;
    const dz = position[3 * i + 2]! - position[3 * p + 2]!;
    const length = Math.sqrt(dx * dx + dy * dy + dz * dz);
    const fall = (8 * mu * length * q) / (Math.PI * r * r * r * r);
    columns.pressure[i] = columns.pressure[p]! + (asked.kind === 'drain' ? fall : -fall);
    columns.transit[i] = columns.transit[p]! + (Math.PI * r * r * length) / q;
  }
}

/** r⁶ = 16μQ²/(π²m). */
export function leastPowerRadius(spec: Spec): (flow: number) => number {
  const { viscosity, maintenance } = spec.blood;
  return (flow) => Math.sqrt(Math.cbrt((16 * viscosity.value * flow * flow) / (Math.PI * Math.PI * maintenance)));
}
