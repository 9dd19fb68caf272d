import { sizeTree } from '../sizing/size-tree.ts';
import type { Spec } from '../spec/types.ts';
import type { Forest } from '../tree/forest.ts';
import { freezeForest } from '../tree/freeze.ts';
import type { Grower } from './grower.ts';

/**
 * The grown forest with its flows and radii from the spec's demands, in preorder.
 *
 * Flows: each terminal its share of the inlet flow, every other tube the sum of what leaves it. Radii: by the spec's
 * sizing rule from those flows, so that laws hold to rounding.
 */
export function freezeGrowth(grower: Grower, spec: Spec): Forest {
  const { builder } = grower;
  const n = builder.count;
  const flow = new Float64Array(n);
  const radius = new Float64Array(n);
  for (let t = 0; t < spec.trees.length; t++) {
    const tree = spec.trees[t]!;
    const { demand } = grower.trees[t]!;
    const order = builder.preorder(t);
    let shares = 0;
    for (const row of order) if (builder.childCount(row) === 0) shares += demand.siteShare(grower.siteOfRow(row));
    for (const row of order) {
      flow[row] =
        builder.childCount(row) === 0 ? (tree.inlet.flow * demand.siteShare(grower.siteOfRow(row))) / shares : 0;
    }
    for (let k = order.length - 1; k > 0; k--) flow[builder.parent[order[k]!]!]! += flow[order[k]!]!;
    const rows = { order, parent: builder.parent, position: builder.position, flow };
    sizeTree(rows, spec, tree, demand.served, radius);
  }
  return freezeForest({
    count: n,
    parent: builder.parent,
    position: builder.position,
    radius,
    flow,
    roots: builder.roots,
  }).forest;
}
