import type { StateIn, StateOut } from '../core/state.ts';
import type { Room } from '../room/room.ts';
import { fixedInletRadius } from '../sizing/size-tree.ts';
import type { Spec } from '../spec/types.ts';
import type { ForestBuilder } from '../tree/builder.ts';
import type { Demand } from './demand.ts';
import { firstGuess } from './first-guess.ts';
import { Resizer } from './resize.ts';
import { plant, type Seedling } from './seedling.ts';

/** First vessels are planted this much wider than foreseen, so that a longer tree still fits its stub. */
export const SPARE = 1.06;

/** One tree of a growing forest: what it was planted as, what it still has to serve, and how it is sized. */
export class GrowingTree {
  readonly seedling: Seedling;
  readonly demand: Demand;
  readonly resizer: Resizer;
  /** True where radii depend on the tree's lengths. */
  readonly resized: boolean;
  /** m; first vessel's radius for which the stub was made. */
  readonly planted: number;
  /** Set when no site is left that could be served. */
  full = false;
  private readonly builder: ForestBuilder;
  private readonly index: number;

  /**
   * Plants a tree of the spec.
   *
   * @param index its place in the spec; trees are planted in that order
   * @param guess m; first vessel's radius to plant with where it depends on the tree
   * @throws InputError where the inlet cannot be planted
   */
  constructor(
    builder: ForestBuilder,
    room: Room,
    spec: Spec,
    index: number,
    demand: Demand,
    guess: number | undefined,
  ) {
    const tree = spec.trees[index]!;
    const fixed = fixedInletRadius(spec, tree, demand.wanted);
    this.builder = builder;
    this.index = index;
    this.demand = demand;
    this.resized = Number.isNaN(fixed);
    this.planted = this.resized ? (guess ?? firstGuess(spec, index, room.tissue)) : fixed;
    this.seedling = plant(builder, room, tree, `trees[${index}]`, this.planted);
    this.resizer = new Resizer(spec, tree);
  }

  /** The tree's rows, parents first. */
  rows(): Int32Array {
    return this.builder.preorder(this.index);
  }

  /** Load of the first vessel, which is the sum of all shares; only once a terminal is served. */
  get whole(): number {
    return this.builder.load[this.builder.child[2 * this.seedling.root]!]!;
  }

  /** Share of a usual terminal; only once one is served. */
  get usualShare(): number {
    return this.whole / this.demand.served;
  }

  /**
   * Sizes the tree anew from its lengths.
   *
   * @param final whether the first vessel takes the radius that comes out, or is held at what it was planted for
   * @returns false where it needs a wider stub than was planted
   */
  resize(final: boolean): boolean {
    const exact = this.resizer.resize(this.builder, this.rows(), this.demand.served);
    // Held at what was planted for: a radius that follows the tree up and down evicts at every step of it.
    this.builder.inletRadius[this.index] = final ? exact : this.planted / SPARE;
    return !(exact > this.planted);
  }

  save(out: StateOut): void {
    out.list('full', 'i32', [Number(this.full)]);
    this.demand.save(out.within('demand'));
    this.resizer.save(out.within('resizer'));
  }

  /** Becomes the tree that was saved; its demand has been restored before it was planted. */
  restore(from: StateIn): void {
    this.full = from.wholes('full')[0] === 1;
    this.resizer.restore(from.within('resizer'));
  }
}
