import { describe, expect, it } from 'vitest';
import { assembleTree, type LooseTree } from '../../../src/formats/assemble.ts';
import { FaultList } from '../../../src/formats/faults.ts';
import { keepRows } from '../../../src/formats/row-order.ts';
import { ZOO } from '../../support/tree-zoo.ts';

/** Nodes and vessels of a record, vessels in a given order of their vessel numbers. */
function looseOf(name: keyof typeof ZOO, order: (vessels: number) => number[]): LooseTree {
  const { forest, names, kinds, order: orders, territory } = ZOO[name]!;
  const rows = Array.from({ length: forest.count }, (_, i) => i).filter((i) => forest.parent[i]! >= 0);
  const listed = order(rows.length).map((v) => rows[v]!);
  return {
    where: 't',
    nodes: forest.count,
    vessels: listed.length,
    position: Float64Array.from(forest.position),
    from: Int32Array.from(listed, (i) => forest.parent[i]!),
    to: Int32Array.from(listed),
    radius: Float64Array.from(listed, (i) => forest.radius[i]!),
    flow: Float64Array.from(listed, (i) => forest.flow[i]!),
    tree: Int32Array.from(listed, (i) => forest.tree[i]!),
    order: Int32Array.from(listed, (i) => orders[i]!),
    vesselField: {},
    nodeField: {},
    territory: territory ? Float64Array.from(listed, (i) => territory[i]!) : null,
    names,
    kinds,
    provenance: null,
    nameNode: String,
    nameVessel: String,
  };
}

const counting = (n: number) => Array.from({ length: n }, (_, i) => i);
const backwards = (n: number) => counting(n).reverse();

describe('nodes and vessels in row order', () => {
  for (const name of Object.keys(ZOO)) {
    it(`give the record that any other order gives: ${name}`, () => {
      const kept = looseOf(name, counting);
      const moved = looseOf(name, backwards);
      expect(keepRows(kept)).not.toBeNull();
      if (moved.vessels > 1) expect(keepRows(moved)).toBeNull();
      const { record } = assembleTree(kept, new FaultList(), []);
      expect(record).toEqual(assembleTree(moved, new FaultList(), []).record);
      expect(record.forest.parent).toEqual(ZOO[name]!.forest.parent);
    });
  }

  const two = looseOf('two trees, three children', counting);
  const changed = (change: Partial<LooseTree>) => keepRows({ ...two, ...change });

  it('are told from others', () => {
    expect(changed({})).not.toBeNull();
    expect(changed({ flow: null })).toBeNull();
    expect(changed({ nodes: two.nodes + 1 })).toBeNull();
    expect(changed({ tree: two.tree!.map((t) => 1 - t) })).toBeNull();
    const line = { nodes: 5, vessels: 4, tree: null, radius: new Float64Array(4), flow: new Float64Array(4) };
    const told = (from: number[], to: number[]) =>
      keepRows({ ...two, ...line, from: Int32Array.from(from), to: Int32Array.from(to) }) !== null;
    expect(told([0, 1, 2, 1], [1, 2, 3, 4])).toBe(true);
    // Level by level, two vessels at the root, a vessel to a node before it, a root that comes late.
    expect(told([0, 1, 1, 2], [1, 2, 3, 4])).toBe(false);
    expect(told([0, 1, 2, 0], [1, 2, 3, 4])).toBe(false);
    expect(told([0, 1, 2, 3], [1, 2, 3, 2])).toBe(false);
    expect(told([4, 1, 2, 1], [1, 2, 3, 0])).toBe(false);
  });
});
