import type { Memory } from '../core/memory.ts';
import type { StateIn, StateOut } from '../core/state.ts';
import { Room } from '../room/room.ts';
import { junctionExponent } from '../sizing/size-tree.ts';
import type { Spec } from '../spec/types.ts';
import type { Tissue } from '../tissue/tissue.ts';
import { ForestBuilder } from '../tree/builder.ts';
import type { Demand } from './demand.ts';
import { GrowingTree } from './growing-tree.ts';
import { TerminalSites } from './terminal-sites.ts';
import { shareByTerritory } from './territories.ts';

/** Edge of a grid cell over the spacing of terminals. */
const CELL = 0.9;

/** All trees of a spec while they grow in one tissue: their rows, the room they stand in, and what each is to serve. */
export class GrowingForest {
  readonly builder: ForestBuilder;
  readonly room: Room;
  readonly trees: readonly GrowingTree[];
  readonly sites = new TerminalSites();
  /** Terminals wanted. */
  readonly wanted: number;
  /** Set when a first vessel needs a wider stub than was planted: the tree must be planted anew. */
  cramped = false;
  private readonly tissue: Tissue;

  /**
   * Plants each tree.
   *
   * @param demands    one a tree of the spec, in its order
   * @param inletGuess (trees) m; first vessels' radii to plant with where they depend on the tree
   * @throws InputError where an inlet cannot be planted
   */
  constructor(
    spec: Spec,
    tissue: Tissue,
    demands: readonly Demand[],
    inletGuess: readonly number[] | null,
    memory: Memory,
  ) {
    this.tissue = tissue;
    this.wanted = demands.reduce((sum, demand) => sum + demand.wanted, 0);
    const builder = new ForestBuilder(junctionExponent(spec), Math.max(64, Math.min(4 * this.wanted, 1 << 20)), memory);
    const limits = {
      gap: spec.clearance.gap,
      cosMinAngle: Math.cos(1.001 * spec.junctions.minAngle),
      cosMinBend: 0,
    };
    const room = new Room(builder, tissue, limits, Math.cbrt(tissue.volume / 8), memory);
    this.builder = builder;
    this.room = room;
    this.trees = demands.map((demand, t) => new GrowingTree(builder, room, spec, t, demand, inletGuess?.[t]));
  }

  /** Terminals served. */
  get served(): number {
    return this.trees.reduce((sum, tree) => sum + tree.demand.served, 0);
  }

  /** Lists all tubes anew, in a grid for as many terminals as there are. */
  regrid(): void {
    this.room.rebuild(CELL * Math.cbrt(this.tissue.volume / this.served));
  }

  /** Sizes a tree anew where its radii depend on its lengths; see `GrowingTree.resize`. Gives whether they do. */
  resize(t: number, final: boolean): boolean {
    const tree = this.trees[t]!;
    if (!tree.resized) return false;
    if (!tree.resize(final)) this.cramped = true;
    return true;
  }

  /** Sets a tree's shares by the territories of its terminals, where that is asked; true if they were set anew. */
  shareByTerritory(t: number): boolean {
    return shareByTerritory(this.builder, t, this.tissue, this.trees[t]!.demand, (row) => this.sites.of(row));
  }

  /** m; first vessels' radii foreseen for trees of so many terminals. */
  foresee(wanted: readonly number[]): number[] {
    for (let t = 0; t < this.trees.length; t++) this.resize(t, true);
    return this.trees.map((tree, t) =>
      tree.resized ? tree.resizer.foreseenFor(wanted[t]!) : this.builder.inletRadius[t]!,
    );
  }

  /** Sites of a tree that no terminal serves, in the demand's numbering. */
  unserved(t: number): number[] {
    const tree = this.trees[t]!;
    const has = new Uint8Array(tree.demand.siteCount);
    for (const row of tree.rows()) if (this.builder.childCount(row) === 0) has[this.sites.of(row)] = 1;
    const sites: number[] = [];
    for (let site = 0; site < has.length; site++) if (has[site] === 0) sites.push(site);
    return sites;
  }

  /** Saves itself; only right after `regrid`, with no site in hand. */
  save(out: StateOut): void {
    out.list('cramped', 'i32', [Number(this.cramped)]);
    this.builder.save(out.within('builder'));
    this.room.save(out.within('room'));
    this.sites.save(out, this.builder.count);
    this.trees.forEach((tree, t) => {
      tree.save(out.within(`trees[${t}]`));
    });
  }

  /** Becomes the forest that was saved; made of the same spec, guess and, restored already, demands. */
  restore(from: StateIn): void {
    this.cramped = from.wholes('cramped')[0] === 1;
    this.builder.restore(from.within('builder'));
    this.room.restore(from.within('room'));
    this.sites.restore(from, this.builder.capacity);
    this.trees.forEach((tree, t) => {
      tree.restore(from.within(`trees[${t}]`));
    });
  }
}
