import { describe, expect, it } from 'vitest';
import { InputError } from '../../../src/core/errors.ts';
import { JSON_TREE } from '../../../src/formats/tree/json.ts';

interface Doc {
  trees?: unknown;
  nodes: Record<string, unknown>;
  vessels: Record<string, unknown>;
  [key: string]: unknown;
}

/** A Y of four nodes that is fine. */
function fine(): Doc {
  return {
    trees: [{ name: 'a', kind: 'supply' }],
    nodes: { x_mm: [0, 1, 2, 2], y_mm: [0, 0, 1, -1], z_mm: [0, 0, 0, 0.5] },
    vessels: { from: [0, 1, 1], to: [1, 2, 3], radius_um: [100, 80, 70], flow_mL_min: [3, 2, 1] },
  };
}

const decode = (doc: unknown) =>
  JSON_TREE.decode([{ name: 't.json', bytes: new TextEncoder().encode(JSON.stringify(doc)) }]);

/** Faults of a document, as `where: message`. */
function faultsOf(change: (doc: Doc) => void): string[] {
  const doc = fine();
  change(doc);
  try {
    decode(doc);
  } catch (error) {
    if (error instanceof InputError) return error.faults.map((fault) => `${fault.where}: ${fault.message}`);
    throw error;
  }
  return [];
}

describe('assembleTree', () => {
  it('takes a fine tree, in the units that names state', () => {
    const { record, notes } = decode(fine());
    expect(notes).toEqual([]);
    expect(Array.from(record.forest.position.slice(9))).toEqual([2e-3, -1e-3, 0.5e-3]);
    expect(Array.from(record.forest.radius)).toEqual([100e-6, 100e-6, 80e-6, 70e-6]);
    expect(record.forest.flow[0]! / (3e-6 / 60)).toBeCloseTo(1, 14);
    expect(Array.from(record.order)).toEqual([2, 2, 1, 1]);
  });

  const CASES: readonly [string, (doc: Doc) => void, RegExp][] = [
    [
      'a ring',
      (d) => Object.assign(d.vessels, { from: [2, 1, 1], to: [1, 2, 3] }),
      /t\.json vessels\[\d\]: lies on a ring/,
    ],
    [
      'a ring beside a tree',
      (d) => {
        d.nodes = { x_m: [0, 1, 2, 3], y_m: [0, 0, 0, 0], z_m: [0, 0, 0, 0] };
        Object.assign(d.vessels, { from: [0, 2, 3], to: [1, 3, 2] });
      },
      /lies on a ring/,
    ],
    [
      'two parents',
      (d) => Object.assign(d.vessels, { to: [1, 2, 2] }),
      /vessels\[2\]: ends where t\.json vessels\[1\] ends too/,
    ],
    [
      'a node that is not there',
      (d) => Object.assign(d.vessels, { to: [1, 2, 9] }),
      /vessels\.to\[2\]: got 9, expected a node from 0 to 3/,
    ],
    ['half a node', (d) => Object.assign(d.vessels, { to: [1, 2, 2.5] }), /vessels\.to\[2\]: got 2.5/],
    [
      'no radius',
      (d) => Object.assign(d.vessels, { radius_um: [100, 0, 70] }),
      /vessels\[1\]: got radius 0 m, expected > 0/,
    ],
    [
      'a negative radius',
      (d) => Object.assign(d.vessels, { radius_um: [100, -1, 70] }),
      /vessels\[1\]: got radius -0.000001 m/,
    ],
    [
      'a radius of null',
      (d) => Object.assign(d.vessels, { radius_um: [100, null, 70] }),
      /radius_um\[1\]: got null, expected a number/,
    ],
    ['a flow of none', (d) => Object.assign(d.vessels, { flow_mL_min: [3, 3, 0] }), /vessels\[2\]: got flow 0 m³\/s/],
    [
      'an order of none',
      (d) => Object.assign(d.vessels, { order: [2, 1, 0] }),
      /vessels\[2\]: got order 0, expected ≥ 1/,
    ],
    [
      'a vessel without length',
      (d) => Object.assign(d.nodes, { x_mm: [0, 1, 1, 2], y_mm: [0, 0, 0, 0], z_mm: [0, 0, 0, 0] }),
      /vessels\[1\]: got both ends at one place/,
    ],
    [
      'a vessel onto itself',
      (d) => Object.assign(d.vessels, { to: [1, 2, 1], from: [0, 1, 1] }),
      /vessels\[2\]: got both ends at one place/,
    ],
    [
      'no vessels',
      (d) => {
        d.vessels = { from: [], to: [], radius_m: [] };
      },
      /t\.json: got no vessels/,
    ],
    [
      'columns of two lengths',
      (d) => Object.assign(d.vessels, { radius_um: [100, 80] }),
      /t\.json vessels: got columns of 2 and of 3/,
    ],
    [
      'a missing column',
      (d) => {
        delete d.vessels.radius_um;
      },
      /vessels: got columns from, to, flow_mL_min, expected one named radius with a unit of length/,
    ],
    [
      'a length in a unit of pressure',
      (d) => {
        d.vessels = { ...d.vessels, radius_Pa: d.vessels.radius_um };
        delete d.vessels.radius_um;
      },
      /expected one named radius/,
    ],
    ['a missing table', (d) => Object.assign(d, { nodes: 3 }), /t\.json nodes: got 3, expected an object of columns/],
    [
      'a column that is no list',
      (d) => Object.assign(d.vessels, { tree: 'x' }),
      /vessels\.tree: got "x", expected a list/,
    ],
    [
      'trees that disagree along a way',
      (d) => Object.assign(d.vessels, { tree: [0, 0, 1] }),
      /vessels\[2\]: got tree 1, expected 0 as of t\.json vessels\[0\]/,
    ],
    [
      'a bad kind',
      (d) => Object.assign(d, { trees: [{ name: 'a', kind: 'lymph' }] }),
      /got tree kind "lymph", expected supply or drain/,
    ],
    [
      'a bad name',
      (d) => Object.assign(d, { trees: [{ name: '1 a', kind: 'drain' }] }),
      /got tree name "1 a", expected letters/,
    ],
    ['another version', (d) => Object.assign(d, { format_version: 2 }), /format_version: got 2, expected 1/],
    ['a number that overflows', (d) => Object.assign(d.nodes, { x_mm: [0, 1, 2, 1e308 * 10] }), /x_mm\[3\]: got null/],
  ];
  for (const [name, change, message] of CASES) {
    it(`refuses ${name}`, () => expect(faultsOf(change).join('\n')).toMatch(message));
  }

  it('tells all faults at once, but not a million of one', () => {
    const faults = faultsOf((doc) => Object.assign(doc.vessels, { radius_um: [0, -1, 70], flow_mL_min: [3, 2, -1] }));
    expect(faults.length).toBe(3);
    const n = 1000;
    const line = Array.from({ length: n + 1 }, (_, i) => i);
    const many = faultsOf((doc) => {
      doc.nodes = { x_m: line, y_m: line, z_m: line };
      doc.vessels = { from: line.slice(0, n), to: line.slice(1), radius_m: line.slice(1).map((i) => -i) };
    });
    expect(many.length).toBe(21);
    expect(many.at(-1)).toMatch(/and 980 more faults/);
  });

  it('takes rows in any order and gives the same tree', () => {
    const doc = fine();
    const perm = [2, 0, 3, 1];
    const back = perm.map((_, old) => perm.indexOf(old));
    const move = (values: unknown) => perm.map((old) => (values as number[])[old]!);
    for (const key of Object.keys(doc.nodes)) doc.nodes[key] = move(doc.nodes[key]);
    for (const key of Object.keys(doc.vessels))
      doc.vessels[key] = [2, 0, 1].map((v) => (doc.vessels[key] as number[])[v]!);
    for (const key of ['from', 'to']) doc.vessels[key] = (doc.vessels[key] as number[]).map((node) => back[node]!);
    const { forest } = decode(doc).record;
    const want = decode(fine()).record.forest;
    expect(Array.from(forest.position)).toEqual(Array.from(want.position));
    expect(Array.from(forest.radius)).toEqual(Array.from(want.radius));
  });

  it('supplies flow as the number of terminals and says so', () => {
    const doc = fine();
    delete doc.vessels.flow_mL_min;
    const { record, notes } = decode(doc);
    expect(Array.from(record.forest.flow)).toEqual([2, 2, 1, 1]);
    expect(notes).toEqual(['t.json: holds no flow; every terminal was given 1 m³/s, so flows are shares only']);
  });

  it('makes a tree of every vessel that leaves a root, and says so', () => {
    const doc = fine();
    delete doc.trees;
    Object.assign(doc.vessels, { from: [0, 0, 1], to: [1, 2, 3] });
    delete doc.vessels.flow_mL_min;
    const { record, notes } = decode(doc);
    expect(Array.from(record.forest.treeStart)).toEqual([0, 3, 5]);
    expect(Array.from(record.forest.position.slice(9, 12))).toEqual([0, 0, 0]);
    expect(Array.from(record.forest.flow)).toEqual([1, 1, 1, 1, 1]);
    expect(record.names).toEqual(['tree_0', 'tree_1']);
    expect(notes.join()).toMatch(/1 roots had several vessels/);
  });

  it('orders trees by index, names along, and numbers anew where two share one', () => {
    const doc: Doc = {
      trees: [
        { name: 'first', kind: 'drain' },
        { name: 'second', kind: 'supply' },
      ],
      nodes: { x_m: [0, 1, 2, 3], y_m: [0, 0, 0, 0], z_m: [0, 0, 0, 0] },
      vessels: { from: [0, 2], to: [1, 3], radius_m: [1, 2], flow_m3_s: [1, 1], tree: [5, 3] },
    };
    const { record } = decode(doc);
    expect(Array.from(record.forest.radius)).toEqual([2, 2, 1, 1]);
    expect(record.names).toEqual(['first', 'second']);
    expect(record.kinds).toEqual(['drain', 'supply']);
    doc.vessels.tree = [4, 4];
    const shared = decode(doc);
    expect(Array.from(shared.record.forest.radius)).toEqual([1, 1, 2, 2]);
    expect(shared.notes.join()).toMatch(/numbered anew/);
  });

  it('leaves out idle nodes and a solution that lacks a part, and says so', () => {
    const doc = fine();
    for (const key of Object.keys(doc.nodes)) (doc.nodes[key] as number[]).push(9);
    doc.vessels.reynolds = [1, 1, 1];
    const { record, notes } = decode(doc);
    expect(record.forest.count).toBe(4);
    expect(record.field).toBeNull();
    expect(notes[0]).toMatch(/1 nodes belong to no vessel/);
    expect(notes[1]).toMatch(/lacks viscosity_Pa_s, velocity_m_s, wall_shear_Pa, haematocrit, pressure_Pa, transit_s/);
  });

  it('does not mind a long chain, nor very many trees', () => {
    const n = 300_000;
    const line = Array.from({ length: n + 1 }, (_, i) => i);
    const chain = decode({
      nodes: { x_m: line, y_m: line, z_m: line },
      vessels: { from: line.slice(0, n), to: line.slice(1), radius_m: line.slice(1) },
    });
    expect(chain.record.forest.count).toBe(n + 1);
    const apart = decode({
      nodes: { x_m: line.slice(1), y_m: line.slice(1), z_m: line.slice(1) },
      vessels: {
        from: line.slice(0, n / 2).map((i) => 2 * i),
        to: line.slice(0, n / 2).map((i) => 2 * i + 1),
        radius_m: line.slice(1, n / 2 + 1),
      },
    });
    expect(apart.record.kinds.length).toBe(n / 2);
  });
});
