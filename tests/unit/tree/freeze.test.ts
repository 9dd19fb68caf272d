import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { InvariantError } from '../../../src/core/errors.ts';
import { freezeForest, type LooseRows } from '../../../src/tree/freeze.ts';
import { shuffleRows } from '../../support/bisected-tree.ts';
import { ZOO } from '../../support/tree-zoo.ts';

/** Rows in preorder by plain recursion, children in the order of their loose rows. */
function plainOrder(loose: LooseRows): number[] {
  const listed: number[] = [];
  const visit = (row: number): void => {
    listed.push(row);
    for (let c = 0; c < loose.count; c++) if (loose.parent[c] === row) visit(c);
  };
  for (let t = 0; t < loose.roots.length; t++) visit(loose.roots[t]!);
  return listed;
}

describe('freezeForest', () => {
  it('gives preorder with children by loose row, as plain recursion does', () => {
    fc.assert(
      fc.property(fc.constantFrom('two trees, three children', 'one junction'), fc.integer(), (name, seed) => {
        const loose = shuffleRows(ZOO[name]!.forest, String(seed));
        const { forest, source } = freezeForest(loose);
        const want = plainOrder(loose);
        expect([...source]).toEqual(want);
        for (let i = 0; i < want.length; i++) {
          const above = loose.parent[want[i]!]!;
          expect(forest.parent[i]).toBe(above < 0 ? -1 : want.indexOf(above));
          expect(forest.position[3 * i + 2]).toBe(loose.position[3 * want[i]! + 2]);
          // A root repeats its only child, the row after it.
          const own = above < 0 ? want[i + 1]! : want[i]!;
          expect([forest.radius[i], forest.flow[i]]).toEqual([loose.radius[own], loose.flow[own]]);
        }
      }),
      { seed: 1, numRuns: 60 },
    );
  });

  it('leaves out what no root reaches', () => {
    const loose = {
      count: 5,
      parent: [2, -2, -1, -2, 0],
      position: [1, 0, 0, 9, 9, 9, 0, 0, 0, 9, 9, 9, 2, 0, 0],
      radius: [1, 0, 0, 0, 1],
      flow: [1, 0, 0, 0, 1],
      roots: [2],
    };
    const { forest, source } = freezeForest(loose);
    expect([...source]).toEqual([2, 0, 4]);
    expect([...forest.parent]).toEqual([-1, 0, 1]);
    expect([...forest.treeStart]).toEqual([0, 3]);
  });

  it('refuses values that no forest holds, and roots without one child', () => {
    const one = { count: 2, parent: [-1, 0], position: [0, 0, 0, 1, 0, 0], radius: [1, 1], flow: [1, 1], roots: [0] };
    expect(freezeForest(one).forest.count).toBe(2);
    for (const broken of [
      { ...one, position: [0, 0, 0, 1, Number.NaN, 0] },
      { ...one, position: [0, 0, 0, 1, 0, -Infinity] },
      { ...one, radius: [1, 0] },
      { ...one, flow: [1, Infinity] },
      { ...one, parent: [-1, -1] },
    ]) {
      expect(() => freezeForest(broken)).toThrow(InvariantError);
    }
  });
});
