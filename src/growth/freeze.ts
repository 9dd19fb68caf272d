import { sizeTree } from '../sizing/size-tree.ts';
import type { Spec } from '../spec/types.ts';
import type { Forest } from '../tree/forest.ts';
import { freezeForest } from '../tree/freeze.ts';
import type { Grower } from './grower.ts';

/** A grown forest, and what its terminals serve. */
export interface FrozenGrowth {
  readonly forest: Forest;
  /** (n) m³ at demand 1; territory of each terminal that has its flow by it, 0 elsewhere; null where none has. */
  readonly territory: Float64Array | null;
}

/** `freezeWithTerritories`, its forest alone. */
export function freezeGrowth(grower: Grower, spec: Spec): Forest {
  return freezeWithTerritories(grower, spec).forest;
}

/**
 * The grown forest with its flows and radii from the spec's demands, in preorder.
 *
 * Flows: each terminal its share of the inlet flow, every other tube the sum of what leaves it. Radii: by the spec's
 * sizing rule from those flows, so that laws hold to rounding.
 */
export function freezeWithTerritories(grower: Grower, spec: Spec): FrozenGrowth {
  const { builder, sites, trees } = grower.forest;
  const n = builder.count;
  const flow = new Float64Array(n);
  const radius = new Float64Array(n);
  let served: Float64Array | null = null;
  for (let t = 0; t < spec.trees.length; t++) {
    const tree = spec.trees[t]!;
    const { demand } = trees[t]!;
    // Where growth ended before it was calm, terminals may have changed since shares were set.
    grower.forest.shareByTerritory(t);
    const order = builder.preorder(t);
    let shares = 0;
    for (const row of order) if (builder.childCount(row) === 0) shares += demand.siteShare(sites.of(row));
    if (demand.byTerritory) served ??= new Float64Array(n);
    for (const row of order) {
      const share = builder.childCount(row) === 0 ? demand.siteShare(sites.of(row)) : 0;
      flow[row] = (tree.inlet.flow * share) / shares;
      if (demand.byTerritory) served![row] = share * demand.territory;
    }
    for (let k = order.length - 1; k > 0; k--) flow[builder.parent[order[k]!]!]! += flow[order[k]!]!;
    const rows = { order, parent: builder.parent, position: builder.position, flow };
    sizeTree(rows, spec, tree, demand.served, radius);
  }
  const { forest, source } = freezeForest({
    count: n,
    parent: builder.parent,
    position: builder.position,
    radius,
    flow,
    roots: builder.roots,
  });
  if (served === null) return { forest, territory: null };
  const territory = new Float64Array(forest.count);
  // A root repeats its vessel's, which may end in a terminal.
  for (let i = 0; i < territory.length; i++) territory[i] = served[source[forest.parent[i]! < 0 ? i + 1 : i]!]!;
  return { forest, territory };
}
