import type { StateIn, StateOut } from '../core/state.ts';
import type { Attacher } from '../moves/attach.ts';
import type { Crew } from '../moves/crew.ts';
import { Rehanger } from '../moves/rehang.ts';
import { Sweeper } from '../moves/sweeper.ts';
import type { GrowingForest } from './growing-forest.ts';
import type { GrowthOptions } from './options.ts';
import type { Settler } from './settler.ts';

/** Growth of the whole forest between two refreshes of potentials and sizes. */
const REFRESH = 1.05;
/** Growth between two sizings of trees whose radii depend on all their lengths. */
const RESIZE = 1.15;
/** Growth between two measurings of territories, where they share the flow: branches then carry what they will. */
const SHARE = 2;
/** Growth between two sweeps that move nodes to their best places. */
const SWEEP = 1.3;
/** Rows from which sweeps are further apart and pass over nodes that carry few terminals; how many one must carry then. */
const MANY_ROWS = 200_000;
const SWEEP_MANY = 1.45;
const SWEPT = 4;
/** Radii over today's that a moved node leaves room for, so that the tubes at it can still gain flow. */
const SWEEP_SLACK = 1.2;
/** Gain, as a share of the cost of its tubes, for which a node is moved. */
const SWEEP_GAIN = 3e-3;
/** Subtrees that carry at least this part of their tree are hung anew now and then while it grows. */
const COARSE = 1000;
/** Radii over today's that a subtree which is hung anew leaves room for. */
const COARSE_SLACK = 1.2;
/** Gain, as a share of what its cut saves, for which a subtree is hung anew. */
const COARSE_GAIN = 1e-3;

/**
 * Does what is done now and then while trees grow, each at its own pace: moves nodes, hangs coarse subtrees anew, measures
 * territories, sizes trees, settles what that breaks, and computes potentials anew.
 *
 * A refresh comes in two halves, `begin` and `end`, with nothing else between them; after a `begin` that has moved nodes the
 * forest can be saved.
 */
export class Refresher {
  private readonly forest: GrowingForest;
  private readonly settler: Settler;
  private readonly attacher: Attacher;
  private readonly sweeper: Sweeper;
  private readonly rehanger: Rehanger;
  private readonly onForest: GrowthOptions['onForest'];
  /** Terminals served at which each is due next. */
  private nextRefresh = 2;
  private nextSweep = 8;
  private nextResize = 2;
  private nextShare = 64;
  /** Set between `begin` and `end`: a forest that was saved there has to end its refresh first. */
  private begun = false;

  constructor(
    forest: GrowingForest,
    settler: Settler,
    attacher: Attacher,
    crew: Crew | null,
    onForest: GrowthOptions['onForest'],
  ) {
    this.forest = forest;
    this.settler = settler;
    this.attacher = attacher;
    this.sweeper = new Sweeper(forest.builder, forest.room, crew, SWEEP_SLACK, SWEEP_GAIN);
    this.rehanger = new Rehanger(forest.builder, forest.room, attacher.potential);
    this.onForest = onForest;
  }

  /** Whether enough has grown for another refresh. */
  get due(): boolean {
    return this.forest.served >= this.nextRefresh;
  }

  /** Whether a refresh was begun and not ended. */
  get owed(): boolean {
    return this.begun;
  }

  /** Moves nodes where that is due; gives whether it was, and the forest can be saved. */
  begin(): boolean {
    const { served, builder } = this.forest;
    this.begun = true;
    this.nextRefresh = Math.max(served + 1, Math.ceil(served * REFRESH));
    if (served < this.nextSweep) return false;
    this.nextSweep = (builder.count < MANY_ROWS ? SWEEP : SWEEP_MANY) * served;
    this.moveNodes();
    return true;
  }

  /** What a refresh does after nodes were moved. */
  end(): void {
    const { forest } = this;
    const { served, trees } = forest;
    this.begun = false;
    const resize = served >= this.nextResize;
    if (resize) this.nextResize = Math.max(served + 1, Math.ceil(served * RESIZE));
    const share = served >= this.nextShare;
    if (share) this.nextShare = SHARE * served;
    let changed = false;
    for (let t = 0; t < trees.length; t++) {
      if (trees[t]!.demand.served === 0) continue;
      const shared = share && forest.shareByTerritory(t);
      const resized = (resize || shared) && forest.resize(t, false);
      changed ||= shared || resized;
    }
    if (changed && this.settler.settleAll(true) > 0) this.settler.straightenAll();
    this.refreshPotentials();
  }

  refreshPotentials(): void {
    for (const tree of this.forest.trees) {
      if (tree.demand.served > 0) this.attacher.refreshPotential(tree.rows(), tree.usualShare);
    }
  }

  /** Saves when each is due; potentials are computed anew before their next use. */
  save(out: StateOut): void {
    const { nextRefresh, nextSweep, nextResize, nextShare, begun } = this;
    out.list('numbers', 'f64', [nextRefresh, nextSweep, nextResize, nextShare, Number(begun)]);
  }

  restore(from: StateIn): void {
    const numbers = from.reals('numbers');
    [this.nextRefresh, this.nextSweep, this.nextResize, this.nextShare] = numbers as unknown as [
      number,
      number,
      number,
      number,
    ];
    this.begun = numbers[4] === 1;
  }

  /** Moves every node once, as if its tubes had their least-power radii, and hangs coarse subtrees anew. */
  private moveNodes(): void {
    const { builder, room } = this.forest;
    this.sweeper.sweep(null, builder.count < MANY_ROWS ? 1 : SWEPT);
    room.slack = COARSE_SLACK;
    this.rehangCoarse();
    room.slack = 1;
    this.forest.regrid();
    this.onForest?.(builder);
  }

  /** Hangs each subtree that carries a fair part of its tree anew where that is cheaper: what is coarse is cheap to mend. */
  private rehangCoarse(): void {
    const { builder, trees } = this.forest;
    for (const tree of trees) {
      if (tree.demand.served < 3) continue;
      const order = tree.rows();
      const { whole } = tree;
      this.attacher.refreshPotential(order, tree.usualShare);
      for (const row of order) if (builder.load[row]! * COARSE >= whole) this.rehanger.rehang(row, COARSE_GAIN);
    }
  }
}
