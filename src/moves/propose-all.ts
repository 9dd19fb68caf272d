import type { Proposer } from './proposer.ts';

/** Sites that places are proposed for together, and what was proposed for each. */
export interface SiteColumns {
  readonly count: number;
  /** Placements kept for each site. */
  readonly keep: number;
  /** (count) the sites in the order they are looked at. */
  readonly order: Int32Array;
  /** (count) tree that is to serve the site, and its share. */
  readonly tree: Int32Array;
  readonly share: Float64Array;
  /** (count, 3) m. */
  readonly position: Float64Array;
  /** (count) placements proposed, (count, keep) rows of their tubes, (count, keep, 3) m, places of their junctions. */
  readonly proposed: Int32Array;
  readonly row: Int32Array;
  readonly at: Float64Array;
}

/** Looks for places for the sites from … end − 1 of a batch's order and writes what is found beside them. */
export function proposeAll(proposer: Proposer, batch: SiteColumns, from: number, end: number): void {
  const { keep, position } = batch;
  for (let n = from; n < end; n++) {
    const k = batch.order[n]!;
    const x = position[3 * k]!;
    const y = position[3 * k + 1]!;
    const z = position[3 * k + 2]!;
    const count = proposer.propose(batch.tree[k]!, x, y, z, batch.share[k]!);
    batch.proposed[k] = count;
    for (let i = 0; i < count; i++) batch.row[k * keep + i] = proposer.row[i]!;
    for (let i = 0; i < 3 * count; i++) batch.at[3 * k * keep + i] = proposer.at[i]!;
  }
}
