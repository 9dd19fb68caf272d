import { randomStream } from '../../src/core/random.ts';
import type { TreeRecord } from '../../src/tree/forest.ts';
import { freezeForest } from '../../src/tree/freeze.ts';
import { strahlerOrders } from '../../src/tree/strahler.ts';

/** Loose rows that a test may change before they become a record. */
export interface LooseTree {
  parent: number[];
  /** m */
  position: [number, number, number][];
  radius: number[];
  flow: number[];
}

/** A random tree with bends and junctions of two and three; row 0 is the root. */
export function looseTree(seed: string, terminals: number): LooseTree {
  const random = randomStream(seed, 'loose-tree');
  const tree: LooseTree = { parent: [-1, 0], position: [], radius: [1e-3, 1e-3], flow: [0, 0] };
  tree.position.push([0, 0, 0], [0.001, 0.0002, 1 / 3000]);
  let tips = [1];
  while (tips.length < terminals) {
    const at = Math.floor(random.next() * tips.length);
    const from = tips[at]!;
    const draw = random.next();
    const children = draw < 0.15 ? 1 : draw < 0.9 ? 2 : 3;
    const fresh: number[] = [];
    for (let k = 0; k < children; k++) {
      const row = tree.parent.length;
      tree.parent.push(from);
      tree.position.push(tree.position[from]!.map((x) => x + 2e-3 * (random.next() - 0.5)) as [number, number, number]);
      tree.radius.push(tree.radius[from]! * (0.7 + 0.2 * random.next()));
      tree.flow.push(0);
      fresh.push(row);
    }
    tips = [...tips.slice(0, at), ...tips.slice(at + 1), ...fresh];
  }
  return tree;
}

/** The record of loose rows, with flows of 1e-12 m³/s a terminal and a made-up but smooth flow solution. */
export function recordOf(tree: LooseTree): TreeRecord {
  const n = tree.parent.length;
  const flow = tree.flow.slice();
  const depth = (row: number): number => (tree.parent[row]! < 0 ? 0 : 1 + depth(tree.parent[row]!));
  const rows = Array.from({ length: n }, (_, row) => row).sort((a, b) => depth(b) - depth(a));
  const hasChild = new Set(tree.parent);
  for (const row of rows) {
    if (!hasChild.has(row)) flow[row] = 1e-12;
    if (tree.parent[row]! >= 0) flow[tree.parent[row]!]! += flow[row]!;
  }
  const { forest } = freezeForest({
    count: n,
    parent: tree.parent,
    position: tree.position.flat(),
    radius: tree.radius,
    flow,
    roots: [tree.parent.indexOf(-1)],
  });
  const column = (of: (row: number) => number) => Float64Array.from({ length: n }, (_, row) => of(row));
  const viscosity = column(() => 0.003);
  return {
    forest,
    kinds: ['supply'],
    names: ['supply'],
    field: {
      forest,
      pressure: column((row) => 8000 - 1e5 * Math.hypot(...forest.position.slice(3 * row, 3 * row + 3))),
      transit: column((row) => 1e3 * Math.hypot(...forest.position.slice(3 * row, 3 * row + 3))),
      viscosity,
      velocity: column((row) => forest.flow[row]! / (forest.radius[row]! * forest.radius[row]!)),
      wallShear: column((row) => forest.flow[row]! / forest.radius[row]!),
      reynolds: column((row) => forest.flow[row]! / forest.radius[row]! / 1e-6),
      haematocrit: column(() => 0),
    },
    order: strahlerOrders(forest),
    provenance: null,
  };
}

/** The same tree with its rows in another order: loose rows shuffled, parents renamed. */
export function shuffled(tree: LooseTree, seed: string): LooseTree {
  const random = randomStream(seed, 'shuffle');
  const order = tree.parent.map((_, row) => row);
  for (let k = order.length - 1; k > 0; k--) {
    const j = Math.floor(random.next() * (k + 1));
    [order[k], order[j]] = [order[j]!, order[k]!];
  }
  const place = new Map(order.map((row, k) => [row, k]));
  return {
    parent: order.map((row) => (tree.parent[row]! < 0 ? -1 : place.get(tree.parent[row]!)!)),
    position: order.map((row) => tree.position[row]!),
    radius: order.map((row) => tree.radius[row]!),
    flow: order.map((row) => tree.flow[row]!),
  };
}
