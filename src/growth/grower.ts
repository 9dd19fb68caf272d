import { inputError } from '../core/errors.ts';
import { ownMemory } from '../core/memory.ts';
import type { Watch } from '../core/progress.ts';
import type { StateIn, StateOut } from '../core/state.ts';
import { Attacher, type AttachOptions, type TerminalWeight } from '../moves/attach.ts';
import { type Crew, workTogether } from '../moves/crew.ts';
import { proposeAll } from '../moves/propose-all.ts';
import { Rehanger } from '../moves/rehang.ts';
import { Sweeper } from '../moves/sweeper.ts';
import { Room } from '../room/room.ts';
import { askedDrop, fixedInletRadius, junctionExponent } from '../sizing/size-tree.ts';
import type { Spec } from '../spec/types.ts';
import type { Tissue } from '../tissue/tissue.ts';
import { ForestBuilder } from '../tree/builder.ts';
import { Batch } from './batch.ts';
import type { Demand } from './demand.ts';
import type { GrowthOptions } from './options.ts';
import { Resizer } from './resize.ts';
import { hangFirst, plant, type Seedling } from './seedling.ts';
import { Settler } from './settler.ts';
import { takeSites } from './take-sites.ts';
import { shareByTerritory } from './territories.ts';

/** Growth of the whole forest between two refreshes of potentials and sizes. */
const REFRESH = 1.05;
/** Sites in hand at once, as a share of the terminals served, and at most. */
const BATCH = 0.02;
const MOST_BATCH = 8192;
/** Lengths at a new junction over those that would just do. */
const PLACE_SLACK = 1.2;
/** Placements proposed for each. */
const KEEP = 4;
/** Growth between two sizings of trees whose radii depend on all their lengths. */
const RESIZE = 1.15;
/** Growth between two measurings of territories, where they share the flow: branches then carry what they will. */
const SHARE = 2;
/** Growth between two sweeps that move nodes to their best places. */
const RELAX = 1.3;
/** Rows from which sweeps are further apart and pass over nodes that carry few terminals; how many one must carry then. */
const MANY_ROWS = 200_000;
const RELAX_MANY = 1.45;
const SWEPT = 4;
/** Subtrees that carry at least this part of their tree are hung anew now and then while it grows. */
const COARSE = 1000;
/** Radii over today's that a moved node leaves room for, so that the tubes at it can still gain flow. */
const SWEEP_SLACK = 1.2;
/** Gain, as a share of the cost of its tubes, for which a node is moved. */
const SWEEP_GAIN = 3e-3;
/** Radii over today's that a subtree which is hung anew leaves room for. */
const COARSE_SLACK = 1.2;
/** Edge of a grid cell over the spacing of terminals. */
const CELL = 0.9;
/** Radius certified over radius needed. */
const HEADROOM = 1.03;
/** First vessels are planted this much wider than foreseen, so that a longer tree still fits its stub. */
export const SPARE = 1.06;
/** Rounds of sizing, evicting and growing again before what is left is dropped. */
const ROUNDS = 24;
/** Rounds altogether; what does not fit by then is left for the check to tell. */
const MOST_ROUNDS = 60;

interface GrowingTree {
  readonly seedling: Seedling;
  readonly demand: Demand;
  readonly resizer: Resizer;
  /** True where radii depend on the tree's lengths. */
  readonly resized: boolean;
  /** Set when no site is left that could be served. */
  full: boolean;
}

export type Stopped = 'complete' | 'no-room' | 'cancelled';

/**
 * Grows all trees of a spec into one tissue, terminal by terminal, each step feasible; see DEVELOPERS.md, "Growth".
 *
 * The forest can be taken at any time from `builder`; `finish` makes it final.
 */
export class Grower {
  readonly builder: ForestBuilder;
  readonly room: Room;
  readonly trees: GrowingTree[] = [];
  /** (trees) m; first vessels' radii for which stubs were made. */
  readonly planted: number[] = [];
  private readonly attacher: Attacher;
  private readonly tissue: Tissue;
  private readonly watch: Watch;
  private readonly wanted: number;
  /** (rows) site of a terminal's row in its tree's demand; −1 elsewhere. */
  private siteOf: Int32Array = new Int32Array(1024).fill(-1);
  /** Set when a first vessel needs a wider stub than was planted: the tree must be planted anew. */
  cramped = false;
  private readonly settler: Settler;
  private readonly batch: Batch;
  private readonly options: AttachOptions;
  private readonly crew: Crew | null;
  private readonly sweeper: Sweeper;
  private readonly rehanger: Rehanger;
  private nextRelax = 8;
  private nextRefresh = 2;
  private nextResize = 2;
  private nextShare = 64;
  /** Times that `finish` was begun. */
  private finishes = 0;
  /** Set when the forest was saved in the middle of a refresh, which is then to be ended first. */
  private owesRefresh = false;
  private readonly onMoment: GrowthOptions['onMoment'];
  private readonly onForest: GrowthOptions['onForest'];

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
    this.tissue = tissue;
    this.watch = options;
    this.crew = options.crew ?? null;
    this.onMoment = options.onMoment;
    this.onForest = options.onForest;
    const memory = this.crew?.memory ?? ownMemory;
    this.wanted = demands.reduce((sum, demand) => sum + demand.wanted, 0);
    const builder = new ForestBuilder(junctionExponent(spec), Math.max(64, Math.min(4 * this.wanted, 1 << 20)), memory);
    this.builder = builder;
    const limits = {
      gap: spec.clearance.gap,
      cosMinAngle: Math.cos(1.001 * spec.junctions.minAngle),
      cosMinBend: 0,
    };
    const room = new Room(builder, tissue, limits, Math.cbrt(tissue.volume / 8), memory);
    this.room = room;
    for (let t = 0; t < spec.trees.length; t++) {
      const tree = spec.trees[t]!;
      const demand = demands[t]!;
      const fixed = fixedInletRadius(spec, tree, demand.wanted);
      const resized = Number.isNaN(fixed);
      const radius = resized ? (inletGuess?.[t] ?? 1.6 * firstGuess(spec, t, tissue)) : fixed;
      this.planted.push(radius);
      const seedling = plant(builder, room, tree, `trees[${t}]`, radius);
      this.trees.push({ seedling, demand, resizer: new Resizer(spec, tree), resized, full: false });
    }
    this.batch = new Batch(tissue, MOST_BATCH, KEEP, memory);
    this.settler = new Settler(builder, room, HEADROOM);
    this.sweeper = new Sweeper(builder, room, this.crew, SWEEP_SLACK, SWEEP_GAIN);
    this.options = {
      first: 8,
      second: 24,
      keep: KEEP,
      slimmest: this.trees.some((tree) => tree.resized) ? 0.7 : 1,
      headroom: HEADROOM,
      slack: PLACE_SLACK,
    };
    const weigh: TerminalWeight = (row, along, length, share) =>
      this.trees[builder.tree[row]!]!.resizer.terminalWeight(builder, row, along, length, share);
    this.attacher = new Attacher(builder, room, this.options, weigh, memory);
    this.rehanger = new Rehanger(builder, room, this.attacher.potential);
  }

  /** m; first vessels' radii foreseen for trees of so many terminals. */
  foresee(wanted: readonly number[]): number[] {
    for (let t = 0; t < this.trees.length; t++) if (this.trees[t]!.resized) this.resize(t, true);
    return this.trees.map((tree, t) =>
      tree.resized ? tree.resizer.foreseenFor(wanted[t]!) : this.builder.inletRadius[t]!,
    );
  }

  get served(): number {
    return this.trees.reduce((sum, tree) => sum + tree.demand.served, 0);
  }

  /** Serves what is wanted, as far as there is room. */
  grow(stage = 'growth'): Stopped {
    const { batch } = this;
    if (this.owesRefresh) this.endRefresh();
    for (let told = this.served; ; ) {
      if (this.watch.signal?.aborted) return 'cancelled';
      if (this.cramped) return 'no-room';
      takeSites(batch, this.trees, Math.min(Math.max(1, Math.floor(BATCH * this.served)), MOST_BATCH));
      if (batch.count === 0) break;
      batch.sort();
      this.propose();
      for (let k = 0; k < batch.count; k++) this.serveOne(batch.order[k]!);
      if (this.served >= this.nextRefresh) this.refresh();
      if (this.served - told >= 256 || batch.count >= 256) {
        told = this.served;
        this.watch.onProgress?.({ stage, done: told, total: this.wanted });
      }
    }
    for (const tree of this.trees) {
      if (tree.demand.served === 0) {
        const t = this.trees.indexOf(tree);
        throw inputError(
          'tissue-too-small',
          `trees[${t}]`,
          `got no terminal that a first vessel of radius ${Number((this.builder.inletRadius[t]! * 1e6).toPrecision(4))} µm can reach, expected tissue with room for it`,
        );
      }
    }
    return this.served === this.wanted ? 'complete' : 'no-room';
  }

  /**
   * Gives radii their final values and mends what that breaks: vessels that no longer fit are evicted and grown anew,
   * until a sizing breaks nothing; in the last round what does not fit is dropped for good.
   */
  finish(): Stopped {
    // What is still out of reach after two calm rounds stays so, for all that a third might find one more.
    let patience = 2;
    if (!this.cramped) {
      this.room.rebuild(this.cell());
      this.refreshPotentials();
      if (this.finishes === 0) this.onMoment?.((out) => this.save(out));
    }
    this.finishes++;
    for (let round = 0; ; round++) {
      if (this.watch.signal?.aborted) return 'cancelled';
      if (this.cramped) return 'no-room';
      for (let t = 0; t < this.trees.length; t++) this.shareByTerritory(t);
      for (let t = 0; t < this.trees.length; t++) if (this.trees[t]!.resized) this.resize(t, true);
      const again = round < ROUNDS;
      const moved = this.settler.mended;
      const evicted = this.settleAll(again);
      // A node that was moved has changed lengths, and with them radii: only a sizing that changes nothing is the last.
      const calm = evicted === 0 && this.settler.mended === moved;
      if ((calm && (this.served === this.wanted || !again || patience === 0)) || round >= MOST_ROUNDS) break;
      if (!again) continue;
      const before = this.served;
      if (round < ROUNDS / 2) {
        // Radii and neighbours are not what they were when a site was given up.
        for (const tree of this.trees) {
          tree.full = false;
          tree.demand.forgive();
        }
      }
      if (this.grow('proof') === 'cancelled') return 'cancelled';
      if (calm && this.served === before) break;
      if (calm) patience--;
    }
    return this.served === this.wanted ? 'complete' : 'no-room';
  }

  /** Vessels that do not fit with their present radii, which only a stub can still be once `finish` is through. */
  misfits(): number[] {
    const rows: number[] = [];
    for (let row = 0; row < this.builder.count; row++) {
      if (this.builder.parent[row]! >= 0 && this.room.outgrown(row) && !this.settler.settle(row)) rows.push(row);
    }
    return rows;
  }

  /** Sites of a tree that no terminal serves, in the demand's numbering. */
  unserved(t: number): number[] {
    const { demand } = this.trees[t]!;
    const has = new Uint8Array(demand.siteCount);
    for (const row of this.builder.preorder(t)) if (this.builder.childCount(row) === 0) has[this.siteOf[row]!] = 1;
    const sites: number[] = [];
    for (let site = 0; site < has.length; site++) if (has[site] === 0) sites.push(site);
    return sites;
  }

  /** Site of a terminal's row in its tree's demand. */
  siteOfRow(row: number): number {
    return this.siteOf[row]!;
  }

  /** Sets a tree's shares by the territories of its terminals, where that is asked. */
  shareByTerritory(t: number): boolean {
    return shareByTerritory(this.builder, t, this.tissue, this.trees[t]!.demand, (row) => this.siteOf[row]!);
  }

  /** Looks for places for all sites in hand, against the forest as it stands. */
  private propose(): void {
    const { batch } = this;
    const { proposer, potential } = this.attacher;
    potential.follow();
    const { tree, count } = batch;
    // A bare tree has no tube to hang on; its first terminal comes alone.
    if (count === 0 || this.trees[tree[0]!]!.demand.served === 0) return;
    const { keep, order, share, position, proposed, row, at } = batch;
    const sites = { count, keep, order, tree, share, position, proposed, row, at };
    workTogether(
      this.crew,
      this.builder,
      this.room,
      { sites },
      count,
      (from, end) => proposeAll(proposer, sites, from, end),
      potential,
      this.options,
    );
  }

  /** Hangs one of the sites in hand, or gives it back. */
  private serveOne(k: number): void {
    const { batch, attacher } = this;
    const t = batch.tree[k]!;
    const tree = this.trees[t]!;
    const { demand } = tree;
    const site = batch.site[k]!;
    const x = batch.position[3 * k]!;
    const y = batch.position[3 * k + 1]!;
    const z = batch.position[3 * k + 2]!;
    const share = batch.share[k]!;
    const first = demand.served === 0;
    let row = -1;
    if (first) row = hangFirst(this.builder, this.room, tree.seedling, x, y, z, share);
    else {
      const count = batch.proposed[k]!;
      row = attacher.hang(batch.row, batch.at, k * batch.keep, count, x, y, z, share);
      // What was hung since has taken the place; where nothing was proposed there is less room now than then.
      if (row < 0 && count > 0 && batch.count > 1) row = attacher.attach(t, x, y, z, share);
      if (row < 0 && demand.isPrecious(site)) row = attacher.attachBent(t, x, y, z, share);
    }
    if (row < 0) {
      demand.giveBack(site, false);
      return;
    }
    demand.serve();
    this.keepSite(row, site);
    if (!first) {
      let branch = row;
      while (this.builder.childCount(this.builder.parent[branch]!) === 1) branch = this.builder.parent[branch]!;
      const junction = this.builder.parent[branch]!;
      const a = this.builder.child[2 * junction]!;
      tree.resizer.extend(this.builder, junction, row, a === branch ? this.builder.child[2 * junction + 1]! : a);
    }
    if (first) attacher.refreshPotential(this.builder.preorder(t), share);
  }

  private refresh(): void {
    const served = this.served;
    this.nextRefresh = Math.max(served + 1, Math.ceil(served * REFRESH));
    if (served >= this.nextRelax) {
      this.nextRelax = (this.builder.count < MANY_ROWS ? RELAX : RELAX_MANY) * served;
      this.relax();
      this.owesRefresh = true;
      if (this.finishes === 0) this.onMoment?.((out) => this.save(out));
    }
    this.endRefresh();
  }

  /** What a refresh does after nodes were moved. */
  private endRefresh(): void {
    const served = this.served;
    this.owesRefresh = false;
    let changed = false;
    const due = served >= this.nextResize;
    if (due) this.nextResize = Math.max(served + 1, Math.ceil(served * RESIZE));
    const share = served >= this.nextShare;
    if (share) this.nextShare = SHARE * served;
    for (let t = 0; t < this.trees.length; t++) {
      if (this.trees[t]!.demand.served === 0) continue;
      const shared = share && this.shareByTerritory(t);
      changed ||= shared;
      if ((due || shared) && this.trees[t]!.resized) {
        this.resize(t, false);
        changed = true;
      }
    }
    if (changed && this.settleAll(true) > 0) {
      for (let t = 0; t < this.trees.length; t++)
        if (this.trees[t]!.demand.served > 0) this.settler.straightenAll(this.builder.preorder(t));
    }
    this.refreshPotentials();
  }

  private refreshPotentials(): void {
    for (let t = 0; t < this.trees.length; t++) {
      const { demand, seedling } = this.trees[t]!;
      if (demand.served === 0) continue;
      const whole = this.builder.load[this.builder.child[2 * seedling.root]!]!;
      this.attacher.refreshPotential(this.builder.preorder(t), whole / demand.served);
    }
  }

  /** Moves every node once; each tree is weighed as if its tubes had their least-power radii. */
  private relax(): void {
    const { room } = this;
    this.sweeper.sweep(null, this.builder.count < MANY_ROWS ? 1 : SWEPT);
    room.slack = COARSE_SLACK;
    this.rehangCoarse();
    room.slack = 1;
    room.rebuild(this.cell());
    this.onForest?.(this.builder);
  }

  /** m; edge of a grid cell for as many terminals as there are. */
  private cell(): number {
    return CELL * Math.cbrt(this.tissue.volume / this.served);
  }

  /**
   * Saves all from which growth goes on as if it had never stopped. Only right after `room.rebuild`, with no site in hand;
   * potentials and what else is refreshed before its next use is not in it.
   */
  save(out: StateOut): void {
    const { mended } = this.settler;
    const { nextRelax, nextRefresh, nextResize, nextShare, finishes } = this;
    const flags = [this.cramped, this.owesRefresh].map(Number);
    const numbers = [mended, nextRelax, nextRefresh, nextResize, nextShare, finishes, ...flags];
    out.list('numbers', 'f64', numbers);
    out.put('siteOf', this.siteOf.subarray(0, this.builder.count));
    this.builder.save(out.within('builder'));
    this.room.save(out.within('room'));
    this.trees.forEach(({ demand, resizer, full }, t) => {
      const part = out.within(`trees[${t}]`);
      part.list('full', 'i32', [Number(full)]);
      demand.save(part.within('demand'));
      resizer.save(part.within('resizer'));
    });
  }

  /** Becomes the grower that was saved; made of the same spec, guess and, restored already, demands. */
  restore(from: StateIn): void {
    const numbers = from.reals('numbers');
    this.settler.mended = numbers[0]!;
    this.nextRelax = numbers[1]!;
    this.nextRefresh = numbers[2]!;
    this.nextResize = numbers[3]!;
    this.nextShare = numbers[4]!;
    this.finishes = numbers[5]!;
    this.cramped = numbers[6] === 1;
    this.owesRefresh = numbers[7] === 1;
    this.builder.restore(from.within('builder'));
    this.room.restore(from.within('room'));
    this.siteOf = from.wholes('siteOf', new Int32Array(this.builder.capacity).fill(-1));
    this.trees.forEach((tree, t) => {
      const part = from.within(`trees[${t}]`);
      tree.full = part.wholes('full')[0] === 1;
      tree.resizer.restore(part.within('resizer'));
    });
  }

  /** Hangs each subtree that carries a fair part of its tree anew where that is cheaper: what is coarse is cheap to mend. */
  private rehangCoarse(): void {
    const { builder } = this;
    for (let t = 0; t < this.trees.length; t++) {
      const { demand, seedling } = this.trees[t]!;
      if (demand.served < 3) continue;
      const order = builder.preorder(t);
      const whole = builder.load[builder.child[2 * seedling.root]!]!;
      this.attacher.refreshPotential(order, whole / demand.served);
      for (const row of order) if (builder.load[row]! * COARSE >= whole) this.rehanger.rehang(row, 1e-3);
    }
  }

  private resize(t: number, final: boolean): void {
    const { resizer, demand } = this.trees[t]!;
    const exact = resizer.resize(this.builder, this.builder.preorder(t), demand.served);
    const planted = this.planted[t]!;
    if (exact > planted) this.cramped = true;
    // Held at what was planted for: a radius that follows the tree up and down evicts at every step of it.
    this.builder.inletRadius[t] = final ? exact : planted / SPARE;
  }

  /** Makes all vessels fit with their present radii; evicted sites are tried again or given up. */
  private settleAll(again: boolean): number {
    let evicted = 0;
    for (let t = 0; t < this.trees.length; t++) {
      const { demand } = this.trees[t]!;
      if (demand.served === 0) continue;
      evicted += this.settler.settleAll(this.builder.preorder(t), (terminal) => {
        const { demand: theirs } = this.trees[this.builder.tree[terminal]!]!;
        if (again) theirs.giveBack(this.siteOf[terminal]!, true);
        else theirs.served--;
        this.siteOf[terminal] = -1;
      });
    }
    return evicted;
  }

  private keepSite(row: number, site: number): void {
    if (row >= this.siteOf.length) {
      const wider = new Int32Array(Math.max(row + 1, 2 * this.siteOf.length)).fill(-1);
      wider.set(this.siteOf);
      this.siteOf = wider;
    }
    this.siteOf[row] = site;
  }
}

/** m; a first vessel that drops half of what is asked on the way to the tissue's middle. */
export function firstGuess(spec: Spec, t: number, tissue: Tissue): number {
  const tree = spec.trees[t]!;
  const [x, y, z] = tree.inlet.position;
  const dx = Math.max(tissue.max[0] - x, x - tissue.min[0]);
  const dy = Math.max(tissue.max[1] - y, y - tissue.min[1]);
  const dz = Math.max(tissue.max[2] - z, z - tissue.min[2]);
  const length = Math.sqrt(dx * dx + dy * dy + dz * dz);
  const drop = askedDrop(tree);
  return Math.sqrt(Math.sqrt((2 * 8 * spec.blood.viscosity.value * 0.5 * length * tree.inlet.flow) / (Math.PI * drop)));
}
