import { FIT_MARGIN, RUN_OUT, separationReach } from '../room/reach.ts';
import type { Room } from '../room/room.ts';
import type { ForestBuilder } from '../tree/builder.ts';
import { Candidates } from './candidates.ts';
import { JunctionPlaces } from './junction-places.ts';
import { leastPowerPerLength, type PerLength } from './per-length.ts';
import type { Potential } from './potential.ts';
import { LENIENT, Preview } from './preview.ts';
import { span } from './span.ts';

/*
 * Lab notes (ellipsoid, 10,000 terminals, about 5 % vessel volume, γ = 3, one thread of a busy two-core machine, December 2026):
 * - Each place made, judged with all it touches, and taken back: 10.6 tries a terminal; two in five were refused because the
 *   new vessel met another, one in three because a junction did not fit, and sites that stand in a vessel or too near the
 *   wall took two thirds of all tries. Looked at first without a change: 1.5 tries, 1.2 with slack in the lengths.
 * - 16 tubes a site, 12, 8: the same cost within the scatter of seeds; 8, then 24 where none would do.
 * - One place a tube: a third more sites find none, because the way up refuses the best place of a tube as often as not.
 */

/** Most placements that one look may propose. */
export const MOST_PROPOSED = 8;

/** Most of them on one tube. */
const MOST_ON_TUBE = 2;

export interface ProposeOptions {
  /** Tubes looked at in the first try, and in the second where none of them would do. */
  readonly first: number;
  readonly second: number;
  /** Placements wanted, ≤ MOST_PROPOSED. */
  readonly keep: number;
  /** Share of the radius that its flow alone would give which a terminal has at least. */
  readonly slimmest: number;
  /** Lengths at a new junction over those that would just do, > 1. */
  readonly slack: number;
}

/** Whether a junction place is that of the bend above a tube, which then becomes the junction. */
export function isAtBend(builder: ForestBuilder, row: number, x: number, y: number, z: number): boolean {
  const bend = builder.parent[row]!;
  const p = builder.position;
  return (
    builder.childCount(bend) === 1 &&
    builder.parent[bend]! >= 0 &&
    p[3 * bend] === x &&
    p[3 * bend + 1] === y &&
    p[3 * bend + 2] === z
  );
}

/**
 * Finds where a terminal or a subtree might hang: tubes near by, those first that add least power, and on each the
 * junction places at which everything looked at would fit. Changes nothing; the forest may be shared and frozen.
 *
 * What it cannot know is whether the way up has room for the added flow; whoever makes the change asks that.
 */
export class Proposer {
  /**
   * (keep) rows of the tubes proposed, cheapest first, and (keep, 3) m, the places of their junctions; the very place of
   * a bend above the tube means that the bend itself becomes the junction.
   */
  readonly row = new Int32Array(MOST_PROPOSED);
  readonly at = new Float64Array(3 * MOST_PROPOSED);
  readonly candidates: Candidates;
  readonly places: JunctionPlaces;
  readonly preview: Preview;
  private readonly builder: ForestBuilder;
  private readonly room: Room;
  private readonly options: ProposeOptions;
  /** How often each step was taken; for lab notes and benches. */
  readonly tally = { sites: 0, taken: 0, candidates: 0, places: 0 };

  constructor(
    builder: ForestBuilder,
    room: Room,
    potential: Potential,
    options: ProposeOptions,
    perLength: PerLength = leastPowerPerLength,
  ) {
    this.builder = builder;
    this.room = room;
    this.options = options;
    this.preview = new Preview(builder, room);
    this.candidates = new Candidates(builder, room, potential, perLength);
    this.places = new JunctionPlaces(builder, room, this.preview, perLength);
    this.places.slack = options.slack;
  }

  /**
   * Proposes places for a new terminal.
   *
   * @param share flow share, > 0
   * @returns number proposed; they are in `row` and `at` until the next call
   */
  propose(tree: number, x: number, y: number, z: number, share: number): number {
    const { builder, options } = this;
    this.tally.sites++;
    const first = builder.child[2 * builder.roots[tree]!]!;
    const whole = builder.load[first]!;
    const own = options.slimmest * builder.inletRadius[tree]! * this.rootOf(share / (whole + share));
    const shrink = this.rootOf(whole / (whole + share));
    if (!this.room.tissue.deeperThan(x, y, z, own)) {
      this.tally.taken++;
      return 0;
    }
    const found = this.candidates.search(tree, x, y, z, share, options.first, own);
    if (found < 0) {
      this.tally.taken++;
      return 0;
    }
    const count = this.weigh(0, found, x, y, z, share, -1, RUN_OUT, shrink);
    if (count > 0 || found < options.first) return count;
    const more = this.candidates.search(tree, x, y, z, share, options.second);
    return this.weigh(options.first, more, x, y, z, share, -1, RUN_OUT, shrink);
  }

  /**
   * Proposes places for a subtree that has been cut.
   *
   * @param top   its first row, whose parent is the loose node
   * @param least share that a tube must carry to be looked at
   * @param worth cost below which a place is worth a look, and what a tube's way up adds to the cost at the tube
   */
  proposeCut(top: number, least: number, worth: number, wayUp: (row: number) => number): number {
    const { builder, options, preview } = this;
    this.tally.sites++;
    const p = builder.position;
    const x = p[3 * top]!;
    const y = p[3 * top + 1]!;
    const z = p[3 * top + 2]!;
    const share = builder.load[top]!;
    const loose = builder.parent[top]!;
    const length = span(x - p[3 * loose]!, y - p[3 * loose + 1]!, z - p[3 * loose + 2]!);
    const found = this.candidates.search(
      builder.tree[top]!,
      x,
      y,
      z,
      share,
      options.first,
      0,
      top,
      least,
      0.5 * length,
      3 * length + this.room.cell,
    );
    const { rows, local } = this.candidates;
    let kept = 0;
    for (let k = 0; k < found; k++) {
      const row = rows[k]!;
      if (local[k]! < worth && local[k]! + wayUp(builder.parent[row]!) < worth) rows[kept++] = row;
    }
    if (kept === 0) return 0;
    const run = Math.max(preview.ballWith(top, -1, 0, 0, 0, 0) / builder.radius(top), 1);
    preview.ignored = top;
    const count = this.weigh(0, kept, x, y, z, share, top, run, 1);
    preview.ignored = -1;
    return count;
  }

  /** Goes through candidates from … end − 1 and keeps placements that look well. */
  private weigh(
    from: number,
    end: number,
    x: number,
    y: number,
    z: number,
    share: number,
    top: number,
    run: number,
    shrink: number,
  ): number {
    const { candidates, places, options } = this;
    this.preview.shrink = shrink;
    let count = 0;
    for (let c = from; c < end && count < options.keep; c++) {
      const row = candidates.rows[c]!;
      this.tally.candidates++;
      if (this.bendLooksWell(row, x, y, z, share, top, run, shrink)) {
        const bend = this.builder.parent[row]!;
        this.row[count] = row;
        for (let i = 0; i < 3; i++) this.at[3 * count + i] = this.builder.position[3 * bend + i]!;
        if (++count === options.keep) break;
      }
      const found = places.find(row, x, y, z, share, run, shrink);
      let onRow = 0;
      for (let k = 0; k < found && onRow < MOST_ON_TUBE && count < options.keep; k++) {
        this.tally.places++;
        if (!this.looksWell(row, k, x, y, z, top)) continue;
        this.row[count] = row;
        this.at[3 * count] = places.at[3 * k]!;
        this.at[3 * count + 1] = places.at[3 * k + 1]!;
        this.at[3 * count + 2] = places.at[3 * k + 2]!;
        count++;
        onRow++;
      }
    }
    this.preview.shrink = 1;
    return count;
  }

  /** Whether the node above a tube is a bend, not a root, at which the new vessel would fit as a second child. */
  private bendLooksWell(
    row: number,
    x: number,
    y: number,
    z: number,
    share: number,
    top: number,
    run: number,
    shrink: number,
  ): boolean {
    const { builder, room, preview } = this;
    const bend = builder.parent[row]!;
    const above = builder.parent[bend]!;
    if (above < 0 || builder.child[2 * bend + 1]! >= 0) return false;
    const p = builder.position;
    const bx = p[3 * bend]!;
    const by = p[3 * bend + 1]!;
    const bz = p[3 * bend + 2]!;
    const load = builder.load[row]!;
    const below = shrink * builder.radius(row);
    const wide = below * this.rootOf((load + share) / load);
    const own = below * this.rootOf(share / load);
    const ux = p[3 * above]! - bx;
    const uy = p[3 * above + 1]! - by;
    const uz = p[3 * above + 2]! - bz;
    const vx = p[3 * row]! - bx;
    const vy = p[3 * row + 1]! - by;
    const vz = p[3 * row + 2]! - bz;
    const wx = x - bx;
    const wy = y - by;
    const wz = z - bz;
    const u = span(ux, uy, uz);
    const v = span(vx, vy, vz);
    const w = span(wx, wy, wz);
    const uv = (ux * vx + uy * vy + uz * vz) / (u * v);
    const uw = (ux * wx + uy * wy + uz * wz) / (u * w);
    const vw = (vx * wx + vy * wy + vz * wz) / (v * w);
    const least = room.limits.cosMinAngle;
    if (!(uv <= least && uw <= least && vw <= least)) return false;
    const ball = Math.max(
      separationReach(wide, below, uv),
      separationReach(wide, own, uw),
      separationReach(below, own, vw),
    );
    preview.shrink = shrink;
    if (w < this.places.slack * FIT_MARGIN * (ball + run * own)) return false;
    const ballU = preview.ballWith(above, bend, bx, by, bz, wide);
    if (ballU < 0 || u < LENIENT * FIT_MARGIN * (ball + ballU)) return false;
    const ballV = preview.ballWith(row, bend, bx, by, bz, below);
    if (ballV < 0 || v < LENIENT * FIT_MARGIN * (ball + ballV)) return false;
    return preview.clear(bx, by, bz, x, y, z, own, -1, bend, top) && preview.inside(bx, by, bz, x, y, z, own);
  }

  private rootOf(ratio: number): number {
    const { exponent } = this.builder;
    return exponent === 3 ? Math.cbrt(ratio) : Math.exp(Math.log(ratio) / exponent);
  }

  /** Whether the three tubes of one junction place would fit, as far as can be seen without making them. */
  private looksWell(row: number, k: number, x: number, y: number, z: number, top: number): boolean {
    const { builder, places, preview } = this;
    const p = builder.position;
    const parent = builder.parent[row]!;
    const jx = places.at[3 * k]!;
    const jy = places.at[3 * k + 1]!;
    const jz = places.at[3 * k + 2]!;
    const ball = places.ball[k]!;
    const px = p[3 * parent]!;
    const py = p[3 * parent + 1]!;
    const pz = p[3 * parent + 2]!;
    const cx = p[3 * row]!;
    const cy = p[3 * row + 1]!;
    const cz = p[3 * row + 2]!;
    const ballP = preview.ballWith(parent, row, jx, jy, jz, places.above);
    if (ballP < 0 || span(px - jx, py - jy, pz - jz) < LENIENT * FIT_MARGIN * (ball + ballP)) return false;
    const ballC = preview.ballWith(row, parent, jx, jy, jz, places.below);
    if (ballC < 0 || span(cx - jx, cy - jy, cz - jz) < LENIENT * FIT_MARGIN * (ball + ballC)) return false;
    if (!preview.sparesOthers(parent, row, ballP) || !preview.sparesOthers(row, parent, ballC)) return false;
    if (top >= 0 && builder.child[2 * top]! >= 0) {
      const loose = builder.parent[top]!;
      const ballS = preview.ballWith(top, loose, jx, jy, jz, places.own);
      if (ballS < 0 || span(x - jx, y - jy, z - jz) < LENIENT * FIT_MARGIN * (ball + ballS)) return false;
      if (!preview.sparesOthers(top, loose, ballS)) return false;
    }
    if (!preview.clear(jx, jy, jz, x, y, z, places.own, row, -1, top)) return false;
    if (!preview.inside(jx, jy, jz, x, y, z, places.own)) return false;
    if (places.onTube[k] === 1) return true;
    return (
      preview.clear(px, py, pz, jx, jy, jz, places.above, row, parent, -1) &&
      preview.clear(jx, jy, jz, cx, cy, cz, places.below, row, -1, row) &&
      preview.inside(px, py, pz, jx, jy, jz, places.above) &&
      preview.inside(jx, jy, jz, cx, cy, cz, places.below)
    );
  }
}
