import { solveFlow } from '../../src/flow/solve.ts';
import type { Forest, TreeKind, TreeRecord } from '../../src/tree/forest.ts';
import { strahlerOrders } from '../../src/tree/strahler.ts';
import { forestOf, randomForest } from './small-trees.ts';

/** A record of a forest, solved or not. */
export function recordOf(
  forest: Forest,
  kinds: readonly TreeKind[],
  solved: boolean,
  provenance: string | null,
): TreeRecord {
  const rootPressures = kinds.map((_, t) => 8000 / (t + 1));
  return {
    forest,
    kinds,
    names: kinds.map((kind, t) => `${kind}_${'abc'[t]}`),
    field: solved
      ? solveFlow(forest, kinds, {
          rootPressures,
          viscosity: Float64Array.from({ length: forest.count }, (_, i) => 0.003 + (i % 7) / 3e4),
          density: 1060,
          haematocrit: Float64Array.from(forest.tree, (t) => 0.45 / (t + 1)),
        })
      : null,
    order: strahlerOrders(forest),
    provenance,
  };
}

/** The record with a territory at each terminal of its first tree. */
function withTerritories(record: TreeRecord): TreeRecord {
  const { count, parent, tree } = record.forest;
  const territory = Float64Array.from({ length: count }, (_, i) => (tree[i] === 0 ? 1e-12 / (i + 3) : 0));
  for (let i = 0; i < count; i++) if (parent[i]! >= 0) territory[parent[i]!] = 0;
  return { ...record, territory };
}

/** Records that every format must carry: small and odd, and one of 10⁴ rows. No 0s and 1s that hide a lost digit. */
export const ZOO: Readonly<Record<string, TreeRecord>> = {
  'one tube': recordOf(
    forestOf([
      [-1, 1 / 3, 2e-6, -7 / 11, 1e-6 / 3, 1e-14 / 7],
      [0, 1 / 7, 5e-6, -1 / 13, 1e-6 / 3, 1e-14 / 7],
    ]),
    ['supply'],
    false,
    null,
  ),
  'one junction': recordOf(
    forestOf([
      [-1, 1e-6, 1 / 3, 0.1, 3e-5, 3e-12],
      [0, 2e-6, 2 / 3, 0.2, 3e-5, 3e-12],
      [1, 3.3e-6, 0.71, 0.31, 2e-5 / 3, 1e-12],
      [1, 3e-7, 0.69, -0, 7e-6, 2e-12],
    ]),
    ['supply'],
    true,
    '{"name":"quotes \\" and <tags> & \u00b5m, \u4e2d","seed":"s"}',
  ),
  bend: recordOf(
    forestOf([
      [-1, 0, 0, 0, 1e-4, 1e-9],
      [0, 1e-3, 2e-3, 3e-3, 1e-4, 1e-9],
      [1, 1e-3 / 3, 4e-3, 5e-3, 9e-5, 1e-9],
      [2, 1e-3 / 7, 8e-3, -5e-3, 8e-5, 1e-9],
    ]),
    ['drain'],
    true,
    null,
  ),
  'two trees, three children': recordOf(randomForest('zoo', 40, 2), ['supply', 'drain'], true, '{}'),
  'two trees, unsolved': recordOf(randomForest('zoo2', 5, 2), ['drain', 'supply'], false, '{"a":1}'),
  'two trees, one shared by territory': withTerritories(
    recordOf(randomForest('zoo4', 30, 2), ['supply', 'drain'], true, '{}'),
  ),
  'ten thousand rows': recordOf(randomForest('zoo3', 5000, 3), ['supply', 'drain', 'supply'], true, null),
};
