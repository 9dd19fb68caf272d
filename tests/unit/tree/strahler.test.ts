import { describe, expect, it } from 'vitest';
import type { Forest } from '../../../src/tree/forest.ts';
import { strahlerOrders } from '../../../src/tree/strahler.ts';
import {
  caterpillarShape,
  completeShape,
  forestOf,
  forestOfShape,
  randomForest,
  type Shape,
} from '../../support/small-trees.ts';

/** Segments and elements (maximal chains of one order) by order, root first row left out. */
function census(forest: Forest): { segments: number[]; elements: number[] } {
  const order = strahlerOrders(forest);
  const segments: number[] = [];
  const elements: number[] = [];
  for (let i = 0; i < forest.count; i++) {
    const parent = forest.parent[i]!;
    if (parent < 0) continue;
    const k = order[i]!;
    segments[k] = (segments[k] ?? 0) + 1;
    const starts = forest.parent[parent]! < 0 || order[parent] !== k;
    elements[k] = (elements[k] ?? 0) + (starts ? 1 : 0);
  }
  return { segments, elements };
}

/** The definition, by recursion. */
function recursiveOrder(shape: Shape): number {
  if (typeof shape === 'number') return 1;
  const orders = shape.map(recursiveOrder).sort((a, b) => b - a);
  return orders[0] === orders[1] ? orders[0]! + 1 : orders[0]!;
}

/** All rooted binary trees over labelled sinks: put the last sink on every segment of every smaller tree. */
function topologies(sinks: number): Shape[] {
  if (sinks === 1) return [0];
  const last = sinks - 1;
  const withLast = (shape: Shape): Shape[] => [
    [shape, last],
    ...(typeof shape === 'number'
      ? []
      : shape.flatMap((child, at) => withLast(child).map((grown) => shape.map((old, k) => (k === at ? grown : old))))),
  ];
  return topologies(sinks - 1).flatMap(withLast);
}

describe('strahlerOrders', () => {
  // Source of the three: Strahler's rule; exact, worked by hand.
  it('gives a complete binary tree of depth g root order g + 1 and 2^(g+1−k) elements of order k', () => {
    for (let depth = 1; depth <= 8; depth++) {
      const forest = forestOfShape(completeShape(depth));
      expect(strahlerOrders(forest)[1]).toBe(depth + 1);
      const { segments, elements } = census(forest);
      for (let k = 1; k <= depth + 1; k++) {
        expect(elements[k]).toBe(2 ** (depth + 1 - k));
        expect(segments[k]).toBe(elements[k]);
      }
    }
  });

  it('gives a caterpillar of N terminals orders 1 (N elements) and 2 (one element of N − 1 segments)', () => {
    for (const terminals of [2, 3, 10, 200]) {
      const { segments, elements } = census(forestOfShape(caterpillarShape(terminals)));
      expect(elements.slice(1)).toEqual([terminals, 1]);
      expect(segments.slice(1)).toEqual([terminals, terminals - 1]);
    }
  });

  it('gives [[0,1],[[2,3],4]] five, two (one of two segments) and one element', () => {
    const { segments, elements } = census(
      forestOfShape([
        [0, 1],
        [[2, 3], 4],
      ]),
    );
    expect(elements.slice(1)).toEqual([5, 2, 1]);
    expect(segments.slice(1)).toEqual([5, 3, 1]);
  });

  // Source: standard count (2N−3)!!; computed, two independent enumerations agree. 2N−1 segments.
  it('agrees with the recursion on every binary topology, of which there are (2N−3)!!', () => {
    const counts = [1, 3, 15, 105, 945];
    for (let sinks = 2; sinks <= 6; sinks++) {
      const all = topologies(sinks);
      expect(new Set(all.map((shape) => JSON.stringify(shape))).size).toBe(counts[sinks - 2]);
      for (const shape of all) {
        const forest = forestOfShape(shape);
        expect(forest.count - 1).toBe(2 * sinks - 1);
        expect(strahlerOrders(forest)[1]).toBe(recursiveOrder(shape));
      }
    }
    expect(topologies(7).length).toBe(10395);
  });

  it('carries an order through bends, repeats it at the root, and ties three children like two', () => {
    const bend = forestOf([
      [-1, 0, 0, 0, 1, 2],
      [0, 1, 0, 0, 1, 2],
      [1, 2, 0, 0, 1, 2],
      [2, 3, 1, 0, 1, 1],
      [3, 4, 1, 0, 1, 1],
      [2, 3, -1, 0, 1, 1],
    ]);
    expect(Array.from(strahlerOrders(bend))).toEqual([2, 2, 2, 1, 1, 1]);
    expect(strahlerOrders(forestOfShape([0, 1, 2]))[1]).toBe(2);
    expect(strahlerOrders(forestOfShape([[0, 1], 2, 3]))[1]).toBe(2);
    const random = randomForest('orders', 100, 3);
    for (let t = 0; t < 3; t++) {
      const root = random.treeStart[t]!;
      expect(strahlerOrders(random)[root]).toBe(strahlerOrders(random)[root + 1]);
    }
  });
});
