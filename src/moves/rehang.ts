import type { Room } from '../room/room.ts';
import type { ForestBuilder } from '../tree/builder.ts';
import { leastPowerPerLength, type PerLength } from './per-length.ts';
import type { Potential } from './potential.ts';
import { isAtBend, MOST_PROPOSED, Proposer } from './proposer.ts';
import { Trial } from './trial.ts';

/*
 * Notation: G above J above S, the top of the subtree, and B, its sibling; q the subtree's share; f(Q) cost per length.
 * Cut: G→J, J→B and J→S go, G→B comes, every tube above G carries q less. Hung on P→C at a junction J′: P→C goes, P→J′,
 * J′→C and J′→S come, every tube above P carries q more. Both sums are exact; the potential only picks what to try.
 */

/*
 * Lab notes (ellipsoid, γ = 3, December 2026):
 * - After growth alone, all subtrees of 10,000 terminals, 4.8 % vessel volume: 0.81, 0.16, 0.04, 0.01 % in four rounds; hair-thin
 *   0.35, 0.08, 0.03, 0.01 %. While the tree grows, on what carries 1/500 of it and more, 2 to 14 % (see DEVELOPERS.md).
 * - 70 µs a subtree when all tubes near by were looked at in full; 30 µs once those go that cost too much at their own tube.
 * - The predicted gain is the gain of the whole tree to rounding, in every round.
 */

/** Tubes that carry less than this share of the subtree's flow are not looked at: a trunk does not hang on a twig. */
const LEAST_LOAD = 0.05;

/**
 * Cuts a subtree off and hangs it where it costs less, if there is room for all that this changes: the new tubes, the
 * straight tube where it was cut, and every vessel that now carries more.
 */
export class Rehanger {
  readonly proposer: Proposer;
  private readonly builder: ForestBuilder;
  private readonly room: Room;
  private readonly trial: Trial;
  private readonly lowered: Trial;
  private readonly potential: Potential;
  private readonly perLength: PerLength;

  constructor(builder: ForestBuilder, room: Room, potential: Potential, perLength: PerLength = leastPowerPerLength) {
    this.perLength = perLength;
    this.builder = builder;
    this.room = room;
    this.potential = potential;
    this.proposer = new Proposer(
      builder,
      room,
      potential,
      { first: 16, second: 0, keep: MOST_PROPOSED, slimmest: 0, slack: 1.01 },
      perLength,
    );
    this.trial = new Trial(builder, room, 1);
    this.lowered = new Trial(builder, room, 1);
  }

  /**
   * Looks for a cheaper place for the subtree that starts with a row's tube.
   *
   * @param least share of what the cut saves below which a gain is not worth the change, ≥ 0
   * @param spare cost that the change may add instead of saving, ≥ 0, for annealing; 0: only gains
   * @returns     what was saved, in the unit of `perLength`; less than 0 where `spare` was spent; 0 where the forest is as before
   */
  rehang(top: number, least: number, spare = 0): number {
    const { builder, room } = this;
    const junction = builder.parent[top]!;
    if (junction < 0 || builder.childCount(junction) !== 2 || builder.childCount(top) === 1) return 0;
    const above = builder.parent[junction]!;
    if (above < 0 || room.pinned.has(junction) || room.pinned.has(top)) return 0;
    const wasFirst = builder.child[2 * junction] === top;
    const sibling = builder.child[2 * junction + (wasFirst ? 1 : 0)]!;
    const share = builder.load[top]!;
    const weight = builder.weight[top]!;
    const tree = builder.tree[top]!;
    const { perLength } = this;
    const own = perLength(share, tree);
    const f = perLength(builder.load[sibling]!, tree);
    // The least that any place could cost is nothing: what is saved bounds what is worth a look.
    const saved =
      perLength(builder.load[junction]!, tree) * this.length(junction) +
      own * this.length(top) +
      f * (this.length(sibling) - this.distance(above, sibling)) +
      this.wayUp(above, -share);
    const worth = saved * (1 - least) + spare;
    builder.cut(top);
    this.lowered.raise(above, -share, -weight);
    const count = this.straightLooksWell(above, sibling, junction, top)
      ? this.proposer.proposeCut(top, LEAST_LOAD * share, worth, (row) => this.wayUp(row, share))
      : 0;
    const gain = this.tryAll(top, sibling, junction, share, weight, count, saved, saved - worth);
    if (gain !== 0) {
      builder.endCut(junction);
      return gain;
    }
    this.lowered.lower();
    builder.uncut(top, sibling, wasFirst);
    return 0;
  }

  /** Tries the proposed places, the cheapest first; gives what is saved by the one that holds, or 0. */
  private tryAll(
    top: number,
    sibling: number,
    loose: number,
    share: number,
    weight: number,
    count: number,
    saved: number,
    least: number,
  ): number {
    const { proposer, trial } = this;
    trial.forget();
    const gains = new Float64Array(count);
    const order: number[] = [];
    for (let k = 0; k < count; k++) {
      gains[k] = saved - this.costAt(proposer.row[k]!, k, top, share);
      // To hang where it was is no change; it is in the way only of one that may cost something.
      if (least < 0 && proposer.row[k] === sibling) continue;
      if (gains[k]! > least && gains[k] !== 0) order.push(k);
    }
    order.sort((a, b) => gains[b]! - gains[a]! || a - b);
    for (const k of order) {
      const row = proposer.row[k]!;
      if (trial.isBlocked(row)) continue;
      if (this.tryAt(row, k, top, sibling, loose, share, weight)) return gains[k]!;
    }
    return 0;
  }

  private tryAt(
    row: number,
    k: number,
    top: number,
    sibling: number,
    loose: number,
    share: number,
    weight: number,
  ): boolean {
    const { builder, room, trial, proposer } = this;
    const x = proposer.at[3 * k]!;
    const y = proposer.at[3 * k + 1]!;
    const z = proposer.at[3 * k + 2]!;
    const atBend = isAtBend(builder, row, x, y, z);
    const junction = atBend ? builder.parent[row]! : builder.insertAbove(row, x, y, z);
    const parent = builder.parent[junction]!;
    builder.hang(top, junction);
    trial.raise(junction, share, weight);
    // Hung on its own sibling, the straight tube is parted again and has been looked at as one of the two.
    const straight = row === sibling ? -1 : sibling;
    if (trial.examine(parent, row, junction, top, -1, straight)) {
      room.commit();
      this.potential.follow();
      this.potential.extend(junction, parent);
      this.potential.extend(top, junction);
      return true;
    }
    trial.lower();
    builder.unhang(top, loose);
    if (!atBend) builder.spliceOut(junction);
    return false;
  }

  /** Whether the tube that the cut leaves behind would fit, as far as can be seen. */
  private straightLooksWell(above: number, sibling: number, loose: number, top: number): boolean {
    const { builder } = this;
    const { preview } = this.proposer;
    const p = builder.position;
    preview.ignored = top;
    const well = preview.clear(
      p[3 * above]!,
      p[3 * above + 1]!,
      p[3 * above + 2]!,
      p[3 * sibling]!,
      p[3 * sibling + 1]!,
      p[3 * sibling + 2]!,
      builder.radius(sibling),
      loose,
      above,
      sibling,
    );
    preview.ignored = -1;
    return well;
  }

  /** What hanging on a tube costs, given that the subtree is cut. */
  private costAt(row: number, k: number, top: number, share: number): number {
    const { builder, proposer, perLength } = this;
    const p = builder.position;
    const tree = builder.tree[row]!;
    const { at } = proposer;
    const jx = at[3 * k]!;
    const jy = at[3 * k + 1]!;
    const jz = at[3 * k + 2]!;
    const to = (node: number) => {
      const dx = p[3 * node]! - jx;
      const dy = p[3 * node + 1]! - jy;
      const dz = p[3 * node + 2]! - jz;
      return Math.sqrt(dx * dx + dy * dy + dz * dz);
    };
    const parent = builder.parent[row]!;
    const load = builder.load[row]!;
    return (
      perLength(load + share, tree) * to(parent) +
      perLength(load, tree) * (to(row) - this.distance(parent, row)) +
      perLength(share, tree) * to(top) +
      this.wayUp(parent, share)
    );
  }

  /** Change of cost of the tubes from a row to the root when they carry `share` more; for less, what is saved. */
  private wayUp(row: number, share: number): number {
    const { builder, perLength } = this;
    const tree = builder.tree[row]!;
    let sum = 0;
    for (let at = row; builder.parent[at]! >= 0; at = builder.parent[at]!) {
      const load = builder.load[at]!;
      sum += (perLength(load + share, tree) - perLength(load, tree)) * this.length(at);
    }
    return share < 0 ? -sum : sum;
  }

  private length(row: number): number {
    return this.distance(this.builder.parent[row]!, row);
  }

  private distance(a: number, b: number): number {
    const p = this.builder.position;
    const dx = p[3 * a]! - p[3 * b]!;
    const dy = p[3 * a + 1]! - p[3 * b + 1]!;
    const dz = p[3 * a + 2]! - p[3 * b + 2]!;
    return Math.sqrt(dx * dx + dy * dy + dz * dz);
  }
}
