import type { Room } from '../room/room.ts';
import type { ForestBuilder } from '../tree/builder.ts';
import { BEND_PLACES, BendPlaces } from './bend-places.ts';
import { Candidates } from './candidates.ts';
import { JunctionPlaces } from './junction-places.ts';
import { Potential } from './potential.ts';
import { span } from './span.ts';

/*
 * Lab notes (box, γ = 3, one thread of a busy two-core machine, December 2026):
 * - Best junction by the closed form, four places a tube (best; on the tube at two heights; part of the way to the site),
 *   16 tubes, then 64: 20,000 terminals at 5.5 % vessel volume take about 0.25 ms each, 1 in 7 sites finds no place.
 * - Feasible at every commit (reserves, see room.ts): no overlap, no misfit at any size tried up to 10⁵. The price: at
 *   20,000 terminals Σ Q^(2/3) L is 3.52 with hair-thin vessels, 3.87 at 0.5 % and 5.72 at 6 % vessel volume.
 */

/** What growth asks of an attachment search. */
export interface AttachOptions {
  /** Tubes looked at in the first try, and in the second where none of them would do. */
  readonly first: number;
  readonly second: number;
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
  private readonly options: AttachOptions;
  private readonly terminalWeight: TerminalWeight;
  private readonly potential: Potential;
  private readonly candidates: Candidates;
  private readonly places: JunctionPlaces;
  private readonly bends: BendPlaces;
  private savedRow = new Int32Array(256);
  private saved = new Float64Array(512);
  private savedCount = 0;
  /** Tubes above which a way up has refused this site's share; nothing below them can serve it. */
  private readonly blocked: number[] = [];
  /** How often each outcome was met; for lab notes and benches. */
  readonly tally = { sites: 0, served: 0, candidates: 0, tried: 0, path: 0 };

  constructor(builder: ForestBuilder, room: Room, options: AttachOptions, terminalWeight: TerminalWeight) {
    this.builder = builder;
    this.room = room;
    this.options = options;
    this.terminalWeight = terminalWeight;
    this.potential = new Potential(builder);
    this.candidates = new Candidates(builder, room, this.potential);
    this.places = new JunctionPlaces(builder, room);
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
    this.tally.sites++;
    this.blocked.length = 0;
    const first = this.options.first;
    const found = this.candidates.search(tree, x, y, z, share, first);
    for (let k = 0; k < found; k++) {
      const row = this.tryCandidate(this.candidates.rows[k]!, x, y, z, share);
      if (row >= 0) return row;
    }
    if (found < first) return -1;
    const more = this.candidates.search(tree, x, y, z, share, this.options.second);
    for (let k = 0; k < more; k++) {
      const row = this.tryCandidate(this.candidates.rows[k]!, x, y, z, share);
      if (row >= 0) return row;
    }
    return -1;
  }

  /**
   * As `attach`, with one bend in the new vessel, for a site that no straight vessel reaches. Some hundred tries, so for
   * sites that must be served.
   */
  attachBent(tree: number, x: number, y: number, z: number, share: number): number {
    const { candidates, places, bends } = this;
    this.potential.follow();
    this.blocked.length = 0;
    const found = candidates.search(tree, x, y, z, share, BENT_CANDIDATES);
    bends.face(x, y, z);
    for (let c = 0; c < found; c++) {
      const row = candidates.rows[c]!;
      const count = Math.min(2, places.find(row, x, y, z, share));
      for (let k = 0; k < count; k++) {
        const jx = places.at[3 * k]!;
        const jy = places.at[3 * k + 1]!;
        const jz = places.at[3 * k + 2]!;
        for (let b = 0; b < BEND_PLACES && !this.isBlocked(row); b++) {
          bends.find(b, jx, jy, jz, x, y, z);
          const served = this.tryAt(row, jx, jy, jz, x, y, z, share, bends.at);
          if (served >= 0) return served;
        }
      }
    }
    return -1;
  }

  private tryCandidate(row: number, x: number, y: number, z: number, share: number): number {
    this.tally.candidates++;
    if (this.isBlocked(row)) return -1;
    const { at } = this.places;
    const count = this.places.find(row, x, y, z, share);
    for (let k = 0; k < count; k++) {
      const served = this.tryAt(row, at[3 * k]!, at[3 * k + 1]!, at[3 * k + 2]!, x, y, z, share);
      if (served >= 0) return served;
      if (this.blocked.length > 0 && this.isBelow(row, this.blocked[this.blocked.length - 1]!)) return -1;
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
    const parent = builder.parent[row]!;
    const junction = builder.insertAbove(row, jx, jy, jz);
    const bend = via === null ? -1 : builder.addChild(junction, via[0]!, via[1]!, via[2]!);
    const site = builder.addChild(bend < 0 ? junction : bend, x, y, z);
    builder.load[site] = share;
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
    this.raise(junction, share, weight);
    if (this.examine(parent, row, junction, bend, site)) {
      room.commit();
      this.tally.served++;
      this.keepPotential(junction, bend, site);
      return site;
    }
    this.lower();
    builder.removeTerminal(site);
    if (bend >= 0) builder.removeTerminal(bend);
    builder.spliceOut(junction);
    return -1;
  }

  /** Whether all that a try touches fits: its three or four tubes, their ends, and every vessel on the way to the root. */
  private examine(parent: number, row: number, junction: number, bend: number, site: number): boolean {
    const { builder, room } = this;
    const { headroom } = this.options;
    room.begin();
    room.move(junction);
    room.move(site);
    room.move(row);
    if (bend >= 0) room.move(bend);
    // Cheap questions first.
    if (!(room.fits(junction) && room.fits(parent) && room.fits(row))) return false;
    if (bend >= 0 && !(room.fits(bend) && room.certify(bend, headroom))) return false;
    if (!(room.certify(site, headroom) && room.certify(junction, headroom) && room.certify(row, headroom)))
      return false;
    let above = parent;
    let raised = 0;
    while (builder.parent[above]! >= 0) {
      if (room.outgrown(above)) {
        raised++;
        if (!room.certify(above, headroom)) {
          this.tally.path++;
          this.blocked.push(above);
          return false;
        }
      }
      above = builder.parent[above]!;
    }
    if (raised > 0) {
      above = parent;
      while (builder.parent[above]! >= 0) {
        if (room.raised(above)) {
          if (!(room.fits(above) && room.fits(builder.parent[above]!))) {
            this.tally.path++;
            if (above !== parent) this.blocked.push(above);
            return false;
          }
        }
        above = builder.parent[above]!;
      }
      // Fits may cut reserves back only to today's radii, so what was certified stays certified.
    }
    return room.fits(junction) && room.fits(row) && room.fits(parent) && (bend < 0 || room.fits(bend));
  }

  /** Adds load and weight on the way from a row to the root, remembering what stood there. */
  private raise(row: number, share: number, weight: number): void {
    const { builder } = this;
    let size = 0;
    for (let at = row; builder.parent[at]! >= 0; at = builder.parent[at]!) {
      if (size === this.savedRow.length) {
        const rows = new Int32Array(2 * size);
        rows.set(this.savedRow);
        this.savedRow = rows;
        const values = new Float64Array(4 * size);
        values.set(this.saved);
        this.saved = values;
      }
      this.savedRow[size] = at;
      this.saved[2 * size] = builder.load[at]!;
      this.saved[2 * size + 1] = builder.weight[at]!;
      builder.load[at]! += share;
      builder.weight[at]! += weight;
      size++;
    }
    this.savedCount = size;
  }

  /** Takes back the last `raise`. */
  private lower(): void {
    const { builder } = this;
    for (let k = 0; k < this.savedCount; k++) {
      const row = this.savedRow[k]!;
      builder.load[row] = this.saved[2 * k]!;
      builder.weight[row] = this.saved[2 * k + 1]!;
    }
  }

  /** Gives new rows their potentials; a bend takes the mean, as if it lay half way along the straight vessel. */
  private keepPotential(junction: number, bend: number, site: number): void {
    const { potential } = this;
    potential.follow();
    potential.extend(junction, this.builder.parent[junction]!);
    potential.extend(site, junction);
    if (bend >= 0) potential.values[bend] = 0.5 * (potential.values[junction]! + potential.values[site]!);
  }

  private isBlocked(row: number): boolean {
    for (let k = 0; k < this.blocked.length; k++) if (this.isBelow(row, this.blocked[k]!)) return true;
    return false;
  }

  private isBelow(row: number, top: number): boolean {
    const { builder } = this;
    for (let at = row; at >= 0; at = builder.parent[at]!) if (at === top) return true;
    return false;
  }
}
