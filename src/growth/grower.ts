import { inputError } from '../core/errors.ts';
import { ownMemory } from '../core/memory.ts';
import type { StateIn, StateOut } from '../core/state.ts';
import { Attacher, type AttachOptions, type TerminalWeight } from '../moves/attach.ts';
import type { Room } from '../room/room.ts';
import type { Spec } from '../spec/types.ts';
import type { Tissue } from '../tissue/tissue.ts';
import type { ForestBuilder } from '../tree/builder.ts';
import { BatchServer } from './batch-server.ts';
import type { Demand } from './demand.ts';
import { GrowingForest } from './growing-forest.ts';
import type { GrowingTree } from './growing-tree.ts';
import type { GrowthOptions } from './options.ts';
import { Refresher } from './refresher.ts';
import { Settler } from './settler.ts';

/** Lengths at a new junction over those that would just do. */
const PLACE_SLACK = 1.2;
/** Placements proposed for each site. */
const KEEP = 4;
/** Radius certified over radius needed. */
const HEADROOM = 1.03;
/** Rounds of sizing, evicting and growing again before what is left is dropped. */
const ROUNDS = 24;
/** Rounds altogether; what does not fit by then is left for the check to tell. */
const MOST_ROUNDS = 60;

export type Stopped = 'complete' | 'no-room' | 'cancelled';

/**
 * Grows all trees of a spec into one tissue, terminal by terminal, each step feasible; see DEVELOPERS.md, "A walk through one run".
 *
 * The forest can be taken at any time from `builder`; `finish` makes it final.
 */
export class Grower {
  readonly forest: GrowingForest;
  private readonly attacher: Attacher;
  private readonly server: BatchServer;
  private readonly settler: Settler;
  private readonly refresher: Refresher;
  private readonly options: GrowthOptions;
  /** Times that `finish` was begun. */
  private finishes = 0;

  /**
   * @param demands one a tree of the spec, in its order
   * @param inletGuess (trees) m; first vessels' radii to plant with where they depend on the tree, NaN: not known yet
   * @throws InputError where an inlet cannot be planted
   */
  constructor(
    spec: Spec,
    tissue: Tissue,
    demands: readonly Demand[],
    inletGuess: readonly number[] | null,
    options: GrowthOptions = {},
  ) {
    this.options = options;
    const crew = options.crew ?? null;
    const memory = crew?.memory ?? ownMemory;
    const forest = new GrowingForest(spec, tissue, demands, inletGuess, memory);
    this.forest = forest;
    const { builder, room, trees } = forest;
    const asked: AttachOptions = {
      first: 8,
      second: 24,
      keep: KEEP,
      slimmest: trees.some((tree) => tree.resized) ? 0.7 : 1,
      headroom: HEADROOM,
      slack: PLACE_SLACK,
    };
    const weigh: TerminalWeight = (row, along, length, share) =>
      trees[builder.tree[row]!]!.resizer.terminalWeight(builder, row, along, length, share);
    this.attacher = new Attacher(builder, room, asked, weigh, memory);
    this.server = new BatchServer(forest, this.attacher, asked, crew);
    this.settler = new Settler(forest, HEADROOM);
    this.refresher = new Refresher(forest, this.settler, this.attacher, crew, options.onForest);
  }

  get builder(): ForestBuilder {
    return this.forest.builder;
  }

  get room(): Room {
    return this.forest.room;
  }

  get trees(): readonly GrowingTree[] {
    return this.forest.trees;
  }

  /** Terminals served. */
  get served(): number {
    return this.forest.served;
  }

  /** Serves what is wanted, as far as there is room. */
  grow(stage = 'growth'): Stopped {
    const { forest, server, refresher, options } = this;
    if (refresher.owed) refresher.end();
    for (let told = forest.served; ; ) {
      if (options.signal?.aborted) return 'cancelled';
      if (forest.cramped) return 'no-room';
      const tried = server.serve();
      if (tried === 0) break;
      if (refresher.due) {
        if (refresher.begin()) this.tellMoment();
        refresher.end();
      }
      if (forest.served - told >= 256 || tried >= 256) {
        told = forest.served;
        options.onProgress?.({ stage, done: told, total: forest.wanted });
      }
    }
    this.refuseBare();
    return this.outcome();
  }

  /**
   * Gives radii their final values and mends what that breaks: vessels that no longer fit are evicted and grown anew,
   * until a sizing breaks nothing; in the last round what does not fit is dropped for good.
   */
  finish(): Stopped {
    const { forest, settler } = this;
    // What is still out of reach after two calm rounds stays so, for all that a third might find one more.
    let patience = 2;
    if (!forest.cramped) {
      forest.regrid();
      this.refresher.refreshPotentials();
      this.tellMoment();
    }
    this.finishes++;
    for (let round = 0; ; round++) {
      if (this.options.signal?.aborted) return 'cancelled';
      if (forest.cramped) return 'no-room';
      for (let t = 0; t < forest.trees.length; t++) forest.shareByTerritory(t);
      for (let t = 0; t < forest.trees.length; t++) forest.resize(t, true);
      const again = round < ROUNDS;
      const moved = settler.mended;
      const evicted = settler.settleAll(again);
      // A node that was moved has changed lengths, and with them radii: only a sizing that changes nothing is the last.
      const calm = evicted === 0 && settler.mended === moved;
      if ((calm && (forest.served === forest.wanted || !again || patience === 0)) || round >= MOST_ROUNDS) break;
      if (!again) continue;
      const before = forest.served;
      if (round < ROUNDS / 2) {
        // Radii and neighbours are not what they were when a site was given up.
        for (const tree of forest.trees) {
          tree.full = false;
          tree.demand.forgive();
        }
      }
      if (this.grow('proof') === 'cancelled') return 'cancelled';
      if (calm && forest.served === before) break;
      if (calm) patience--;
    }
    return this.outcome();
  }

  /** Vessels that do not fit with their present radii, which only a stub can still be once `finish` is through. */
  misfits(): number[] {
    return this.settler.misfits();
  }

  /** Sites of a tree that no terminal serves, in the demand's numbering. */
  unserved(t: number): number[] {
    return this.forest.unserved(t);
  }

  /**
   * Saves all from which growth goes on as if it had never stopped. Only right after the room's grid was made anew, with no
   * site in hand; potentials and what else is refreshed before its next use is not in it.
   */
  save(out: StateOut): void {
    out.list('finishes', 'i32', [this.finishes]);
    this.forest.save(out.within('forest'));
    this.settler.save(out.within('settler'));
    this.refresher.save(out.within('refresher'));
  }

  /** Becomes the grower that was saved; made of the same spec, guess and, restored already, demands. */
  restore(from: StateIn): void {
    this.finishes = from.wholes('finishes')[0]!;
    this.forest.restore(from.within('forest'));
    this.settler.restore(from.within('settler'));
    this.refresher.restore(from.within('refresher'));
  }

  /** Tells that growth can be saved; what comes after a first `finish` is not. */
  private tellMoment(): void {
    if (this.finishes === 0) this.options.onMoment?.((out) => this.save(out));
  }

  private outcome(): Stopped {
    return this.forest.served === this.forest.wanted ? 'complete' : 'no-room';
  }

  /** A tree that serves nothing is no result. */
  private refuseBare(): void {
    const { trees, builder } = this.forest;
    const t = trees.findIndex((tree) => tree.demand.served === 0);
    if (t < 0) return;
    throw inputError(
      'tissue-too-small',
      `trees[${t}]`,
      `got no terminal that a first vessel of radius ${Number((builder.inletRadius[t]! * 1e6).toPrecision(4))} µm can reach, expected tissue with room for it`,
    );
  }
}
