import type { Batch } from './batch.ts';
import type { Demand } from './demand.ts';

/** A tree that takes sites in hand. */
interface Hungry {
  readonly demand: Demand;
  /** Set when no site is left that could be served. */
  full: boolean;
}

/**
 * Takes sites in hand, from the tree that has served the least part of its demand first.
 *
 * @param most sites at once, ≥ 1
 */
export function takeSites(batch: Batch, trees: readonly Hungry[], most: number): void {
  batch.clear();
  const inHand = new Int32Array(trees.length);
  while (batch.count < most) {
    const t = hungriest(trees, inHand);
    if (t < 0) return;
    const tree = trees[t]!;
    const { demand } = tree;
    // A tree's first terminal is hung alone: there is no tube yet that another could be proposed for.
    if (demand.served === 0 && batch.count > 0) return;
    if (!demand.next()) {
      tree.full = true;
      continue;
    }
    const { site } = demand;
    inHand[t]!++;
    batch.add(t, site, demand.siteX(site), demand.siteY(site), demand.siteZ(site), demand.siteShare(site));
    if (demand.served === 0) return;
  }
}

/** Index of the tree that has served the least part of its demand, or −1 when all are full or served. */
function hungriest(trees: readonly Hungry[], inHand: Int32Array): number {
  let best = -1;
  let least = Infinity;
  for (let t = 0; t < trees.length; t++) {
    const { demand, full } = trees[t]!;
    const taken = demand.served + inHand[t]!;
    if (full || taken >= demand.wanted) continue;
    const part = taken / demand.wanted;
    if (part < least) {
      least = part;
      best = t;
    }
  }
  return best;
}
