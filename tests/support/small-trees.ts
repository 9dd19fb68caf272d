import { randomStream } from '../../src/core/random.ts';
import type { Forest } from '../../src/tree/forest.ts';
import { freezeForest } from '../../src/tree/freeze.ts';

/** A terminal (any number), or the two or more things a junction splits into. */
export type Shape = number | readonly Shape[];

/** Rows as a list, for tests that write a tree by hand: parent, x, y, z, radius, flow. */
export type Row = readonly [parent: number, x: number, y: number, z: number, radius: number, flow: number];

/** Forest of hand-written rows; rows of parent −1 are roots, in order. */
export function forestOf(rows: readonly Row[]): Forest {
  return freezeForest({
    count: rows.length,
    parent: rows.map((row) => row[0]),
    position: rows.flatMap((row) => [row[1], row[2], row[3]]),
    radius: rows.map((row) => row[4]),
    flow: rows.map((row) => row[5]),
    roots: rows.flatMap((row, i) => (row[0] < 0 ? [i] : [])),
  }).forest;
}

/** Forest of one tree with the given branching, flows 1 a terminal, made-up places and radii. */
export function forestOfShape(shape: Shape): Forest {
  const rows: [number, number, number, number, number, number][] = [[-1, 0, 0, 0, 1, 1]];
  const add = (part: Shape, parent: number, depth: number): number => {
    const row = rows.length;
    rows.push([parent, depth + 1 / 3, row, row * depth * 1e-3, 0.1, 1]);
    if (typeof part !== 'number')
      rows[row]![5] = part.reduce((sum: number, child) => sum + add(child, row, depth + 1), 0);
    return rows[row]![5];
  };
  add(shape, 0, 1);
  return forestOf(rows);
}

/** Complete binary branching of the given depth: 2^depth terminals. */
export function completeShape(depth: number): Shape {
  return depth === 0 ? 0 : [completeShape(depth - 1), completeShape(depth - 1)];
}

/** One trunk with single terminals along it: N terminals. */
export function caterpillarShape(terminals: number): Shape {
  let shape: Shape = 0;
  for (let i = 1; i < terminals; i++) shape = [0, shape];
  return shape;
}

/**
 * Random trees in a unit-ish box with bends, junctions of two and three.
 *
 * @param seed      any text
 * @param terminals of each tree, ≥ 1
 * @param trees     how many
 * @param decades   over which radii below 1 mm are spread, whatever the flow
 */
export function randomForest(seed: string, terminals: number, trees = 1, decades = 3): Forest {
  const random = randomStream(seed, 'random-forest');
  const rows: [number, number, number, number, number, number][] = [];
  for (let t = 0; t < trees; t++) {
    const first = rows.length;
    const push = (parent: number): number => {
      const radius = 1e-3 * 10 ** (-decades * random.next());
      rows.push([parent, random.next() / 3 + t, random.next() * 0.7, random.next() * 1.3e-2, radius, 0]);
      return rows.length - 1;
    };
    push(-1);
    const leaves = [push(first)];
    while (leaves.length < terminals) {
      const at = Math.floor(random.next() * leaves.length);
      const leaf = leaves[at]!;
      const kind = random.next();
      const children = kind < 0.15 ? 1 : kind < 0.25 && leaves.length + 2 <= terminals ? 3 : 2;
      leaves.splice(at, 1, ...Array.from({ length: children }, () => push(leaf)));
    }
    for (const leaf of leaves) rows[leaf]![5] = 1e-12 * (0.2 + random.next());
    for (let i = rows.length - 1; i > first; i--) rows[rows[i]![0]]![5] += rows[i]![5];
  }
  return forestOf(rows);
}
