import { ownMemory } from '../core/memory.ts';
import type { Attacher, AttachOptions } from '../moves/attach.ts';
import { type Crew, workTogether } from '../moves/crew.ts';
import { proposeAll } from '../moves/propose-all.ts';
import { Batch } from './batch.ts';
import type { GrowingForest } from './growing-forest.ts';
import type { GrowingTree } from './growing-tree.ts';
import { hangFirst } from './seedling.ts';
import { takeSites } from './take-sites.ts';

/** Sites in hand at once, as a share of the terminals served, and at most. */
const SHARE = 0.02;
const MOST = 8192;

/** Serves sites: takes some in hand, has places proposed for all of them together, and hangs them one by one. */
export class BatchServer {
  private readonly forest: GrowingForest;
  private readonly attacher: Attacher;
  private readonly options: AttachOptions;
  private readonly crew: Crew | null;
  private readonly batch: Batch;

  /** @param options those of the attacher, for the crew's own */
  constructor(forest: GrowingForest, attacher: Attacher, options: AttachOptions, crew: Crew | null) {
    this.forest = forest;
    this.attacher = attacher;
    this.options = options;
    this.crew = crew;
    this.batch = new Batch(forest.room.tissue, MOST, options.keep, crew?.memory ?? ownMemory);
  }

  /** Serves the next sites, or gives them back. Gives how many were in hand; 0: none is left that is worth a try. */
  serve(): number {
    const { batch, forest } = this;
    takeSites(batch, forest.trees, Math.min(Math.max(1, Math.floor(SHARE * forest.served)), MOST));
    if (batch.count === 0) return 0;
    batch.sort();
    this.propose();
    for (let k = 0; k < batch.count; k++) this.serveOne(batch.order[k]!);
    return batch.count;
  }

  /** Looks for places for all sites in hand, against the forest as it stands. */
  private propose(): void {
    const { batch, forest } = this;
    const { proposer, potential } = this.attacher;
    potential.follow();
    const { tree, count } = batch;
    // A bare tree has no tube to hang on; its first terminal comes alone.
    if (forest.trees[tree[0]!]!.demand.served === 0) return;
    const { keep, order, share, position, proposed, row, at } = batch;
    const sites = { count, keep, order, tree, share, position, proposed, row, at };
    workTogether(
      this.crew,
      forest.builder,
      forest.room,
      { sites },
      count,
      (from, end) => proposeAll(proposer, sites, from, end),
      potential,
      this.options,
    );
  }

  /** Hangs one of the sites in hand, or gives it back. */
  private serveOne(k: number): void {
    const { batch, forest } = this;
    const tree = forest.trees[batch.tree[k]!]!;
    const { demand } = tree;
    const site = batch.site[k]!;
    const first = demand.served === 0;
    const row = first ? this.hangFirst(tree, k) : this.hang(k, demand.isPrecious(site));
    if (row < 0) {
      demand.giveBack(site, false);
      return;
    }
    demand.serve();
    forest.sites.keep(row, site);
    if (first) this.attacher.refreshPotential(tree.rows(), batch.share[k]!);
    else this.tellResizer(tree, row);
  }

  /** Hangs a tree's first site; gives its row, or −1. */
  private hangFirst(tree: GrowingTree, k: number): number {
    const { builder, room } = this.forest;
    const { position, share } = this.batch;
    const at = 3 * k;
    return hangFirst(builder, room, tree.seedling, position[at]!, position[at + 1]!, position[at + 2]!, share[k]!);
  }

  /**
   * Hangs any other site; gives its row, or −1.
   *
   * @param bent whether a bent vessel will do
   */
  private hang(k: number, bent: boolean): number {
    const { batch, attacher } = this;
    const t = batch.tree[k]!;
    const x = batch.position[3 * k]!;
    const y = batch.position[3 * k + 1]!;
    const z = batch.position[3 * k + 2]!;
    const share = batch.share[k]!;
    const count = batch.proposed[k]!;
    let row = attacher.hang(batch.row, batch.at, k * batch.keep, count, x, y, z, share);
    // What was hung since has taken the place; where nothing was proposed there is less room now than then.
    if (row < 0 && count > 0 && batch.count > 1) row = attacher.attach(t, x, y, z, share);
    if (row < 0 && bent) row = attacher.attachBent(t, x, y, z, share);
    return row;
  }

  /** Tells what sizes the tree of the rows that came with a terminal. */
  private tellResizer(tree: GrowingTree, row: number): void {
    const { builder } = this.forest;
    let branch = row;
    while (builder.childCount(builder.parent[branch]!) === 1) branch = builder.parent[branch]!;
    const junction = builder.parent[branch]!;
    const a = builder.child[2 * junction]!;
    tree.resizer.extend(builder, junction, row, a === branch ? builder.child[2 * junction + 1]! : a);
  }
}
