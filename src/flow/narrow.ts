import { InvariantError } from '../core/errors.ts';
import type { Reals } from '../core/reals.ts';
import type { Forest } from '../tree/forest.ts';

/**
 * A forest with one tube's radius changed.
 *
 * @param row      row of a tube (not a root)
 * @param fraction what is left of the radius, > 0: 0.5 halves it
 * @returns        a new forest; columns that do not change are shared
 */
export function narrowTube(forest: Forest, row: number, fraction: number): Forest {
  if (!(row >= 0 && row < forest.count) || forest.parent[row]! < 0 || !(fraction > 0)) {
    throw new InvariantError(`narrowTube: got row ${row} of ${forest.count} and fraction ${fraction}`);
  }
  const radius = forest.radius.slice();
  radius[row]! *= fraction;
  const parent = forest.parent[row]!;
  if (forest.parent[parent]! < 0) radius[parent] = radius[row]!;
  return { ...forest, radius };
}

/**
 * A forest with other flows.
 *
 * @param flow (n) m³/s, of one sign in each tree; magnitudes are kept
 * @throws InvariantError where a flow is none or runs against its tree's root tube: a forest cannot hold that
 */
export function withFlow(forest: Forest, flow: Reals): Forest {
  const own = new Float64Array(forest.count);
  for (let i = 0; i < forest.count; i++) {
    const root = flow[forest.treeStart[forest.tree[i]!]!]!;
    own[i] = Math.abs(flow[i]!);
    if (!(flow[i]! * root > 0))
      throw new InvariantError(`withFlow: row ${i} carries ${flow[i]} m³/s, its root ${root}`);
  }
  return { ...forest, flow: own };
}
