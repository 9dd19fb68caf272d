import { type Memory, ownMemory } from '../core/memory.ts';
import type { Room } from '../room/room.ts';
import type { ForestBuilder } from '../tree/builder.ts';
import { BEND_PLACES, BendPlaces } from './bend-places.ts';
import { Potential } from './potential.ts';
import { isAtBend, type ProposeOptions, Proposer } from './proposer.ts';
import { span } from './span.ts';
import { Trial } from './trial.ts';

/** What growth asks of an attachment search. */
export interface AttachOptions extends ProposeOptions {
  /** Radius certified over radius needed, so that a vessel may gain a little without a new look. */
  readonly headroom: number;
}

/** Weight in r^γ of a new terminal that hangs at a point of a tube. */
export type TerminalWeight = (row: number, along: number, length: number, share: number) => number;

/** Tubes from which a bent vessel is tried. */
const BENT_CANDIDATES = 12;

/**
 * Hangs terminals on a forest, each where it adds least power among the places where it fits: tubes near by are taken
 * cheapest first (`Candidates`), and at each a few junction places (`JunctionPlaces`) are tried, which means made, looked
 * at and taken back where anything they touch no longer fits.
 */
export class Attacher {
  private readonly builder: ForestBuilder;
  private readonly room: Room;
  private readonly terminalWeight: TerminalWeight;
  readonly potential: Potential;
  readonly proposer: Proposer;
  private readonly bends: BendPlaces;
  private readonly trial: Trial;
  /** How often each outcome was met; for lab notes and benches. */
  readonly tally = { served: 0, tried: 0 };

  constructor(
    builder: ForestBuilder,
    room: Room,
    options: AttachOptions,
    terminalWeight: TerminalWeight,
    memory: Memory = ownMemory,
  ) {
    this.builder = builder;
    this.room = room;
    this.terminalWeight = terminalWeight;
    this.potential = new Potential(builder, memory);
    this.proposer = new Proposer(builder, room, this.potential, options);
    this.trial = new Trial(builder, room, options.headroom);
    this.bends = new BendPlaces(room.tissue);
  }

  /**
   * Computes every potential of a tree from its loads.
   *
   * @param order the tree's rows, parents first
   * @param usual share of a usual terminal, > 0
   * Cost: O(rows)
   */
  refreshPotential(order: Int32Array, usual: number): void {
    this.potential.refresh(order, usual);
  }

  /**
   * Hangs one terminal at a site.
   *
   * @param tree  index of the tree that is to serve it
   * @param share flow share, > 0
   * @returns the terminal's row, or −1 where no tube near by can carry it; the forest is then as before
   */
  attach(tree: number, x: number, y: number, z: number, share: number): number {
    this.potential.follow();
    const { proposer } = this;
    const count = proposer.propose(tree, x, y, z, share);
    return this.hang(proposer.row, proposer.at, 0, count, x, y, z, share);
  }

  /**
   * Hangs one terminal at the first of some proposed placements that fits.
   *
   * @param rows, at rows of tubes, and (3k) m, places of their junctions; `count` of them from index `from`
   * @returns the terminal's row, or −1 where none fits; the forest is then as before
   */
  hang(
    rows: Int32Array,
    at: Float64Array,
    from: number,
    count: number,
    x: number,
    y: number,
    z: number,
    share: number,
  ): number {
    this.trial.forget();
    for (let k = from; k < from + count; k++) {
      const row = rows[k]!;
      if (this.builder.parent[row]! < 0 || this.trial.isBlocked(row)) continue;
      const served = this.tryAt(row, at[3 * k]!, at[3 * k + 1]!, at[3 * k + 2]!, x, y, z, share);
      if (served >= 0) return served;
    }
    return -1;
  }

  /**
   * As `attach`, with one bend in the new vessel, for a site that no straight vessel reaches. Some hundred tries, so for
   * sites that must be served.
   */
  attachBent(tree: number, x: number, y: number, z: number, share: number): number {
    const { bends } = this;
    const { candidates, places } = this.proposer;
    this.potential.follow();
    this.trial.forget();
    const found = candidates.search(tree, x, y, z, share, BENT_CANDIDATES);
    bends.face(x, y, z);
    for (let c = 0; c < found; c++) {
      const row = candidates.rows[c]!;
      const count = Math.min(2, places.find(row, x, y, z, share));
      for (let k = 0; k < count; k++) {
        const jx = places.at[3 * k]!;
        const jy = places.at[3 * k + 1]!;
        const jz = places.at[3 * k + 2]!;
        for (let b = 0; b < BEND_PLACES && !this.trial.isBlocked(row); b++) {
          bends.find(b, jx, jy, jz, x, y, z);
          const served = this.tryAt(row, jx, jy, jz, x, y, z, share, bends.at);
          if (served >= 0) return served;
        }
      }
    }
    return -1;
  }

  /** Makes the change, looks whether everything it touches still fits, and takes it back if not. */
  private tryAt(
    row: number,
    jx: number,
    jy: number,
    jz: number,
    x: number,
    y: number,
    z: number,
    share: number,
    via: Float64Array | null = null,
  ): number {
    const { builder, room } = this;
    this.tally.tried++;
    const atBend = isAtBend(builder, row, jx, jy, jz);
    const junction = atBend ? builder.parent[row]! : builder.insertAbove(row, jx, jy, jz);
    const bend = via === null ? -1 : builder.addChild(junction, via[0]!, via[1]!, via[2]!);
    const site = builder.addChild(bend < 0 ? junction : bend, x, y, z);
    builder.load[site] = share;
    const parent = builder.parent[junction]!;
    const p = builder.position;
    const ax = p[3 * parent]! - jx;
    const ay = p[3 * parent + 1]! - jy;
    const az = p[3 * parent + 2]! - jz;
    const weight = this.terminalWeight(row, span(ax, ay, az), span(x - jx, y - jy, z - jz), share);
    builder.weight[site] = weight;
    if (bend >= 0) {
      builder.load[bend] = share;
      builder.weight[bend] = weight;
    }
    this.trial.raise(junction, share, weight);
    if (this.trial.examine(parent, row, junction, site, bend, -1)) {
      room.commit();
      this.tally.served++;
      this.keepPotential(junction, bend, site);
      return site;
    }
    this.trial.lower();
    builder.removeTerminal(site);
    if (bend >= 0) builder.removeTerminal(bend);
    if (!atBend) builder.spliceOut(junction);
    return -1;
  }

  /** Gives new rows their potentials; a bend takes the mean, as if it lay half way along the straight vessel. */
  private keepPotential(junction: number, bend: number, site: number): void {
    const { potential } = this;
    potential.follow();
    potential.extend(junction, this.builder.parent[junction]!);
    potential.extend(site, junction);
    if (bend >= 0) potential.values[bend] = 0.5 * (potential.values[junction]! + potential.values[site]!);
  }
}
