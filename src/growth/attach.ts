import { squaredDistanceToSegment } from '../core/segments.ts';
import { fermatPoint } from '../physics/fermat.ts';
import { FIT_MARGIN, RUN_OUT, separationReach } from '../room/reach.ts';
import type { Room } from '../room/room.ts';
import { depthGradient } from '../tissue/depth-gradient.ts';
import type { ForestBuilder } from '../tree/builder.ts';

/*
 * Notation: P→C the tube tried, J the new junction on it, S the site; q the terminal's share, Q a tube's load (shares
 * below it); w = Q^(2/3) power per length.
 *
 * Lab notes (box, γ = 3, one thread of a busy two-core machine, December 2026):
 * - Best junction by the closed form, four places a tube (best; on the tube at two heights; part of the way to the site),
 *   16 tubes, then 64: 20,000 terminals at 5.5 % vessel volume take about 0.25 ms each, 1 in 7 sites finds no place.
 * - Way up by the differential of w instead of a finite share, and a collapsed junction thrown 10 % of the way off: 6 to
 *   10 % dearer than the plain twin at 60 terminals; as now, within 2 %.
 * - Feasible at every commit (reserves, see room.ts): no overlap, no misfit at any size tried up to 10⁵. The price: at
 *   20,000 terminals Σ w L is 3.52 with hair-thin vessels, 3.87 at 0.5 % and 5.72 at 6 % vessel volume.
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

const TRIES = 6;
/** Tubes from which a bent vessel is tried. */
const BENT_CANDIDATES = 12;

/**
 * Hangs terminals on a forest, each where it adds least power among the places where it fits.
 *
 * Cost model: power per length of a tube is Q^(2/3) (least power, constant viscosity). A terminal of share q on the
 * tube P→C costs the change of three tubes at their best junction, plus what its flow costs on the way from the root to
 * P. That is kept as a potential, Σ ((Q + q̄)^(2/3) − Q^(2/3)) L / q̄ for a terminal of the usual share q̄, so one
 * candidate costs O(1). (The differential (2/3) Q^(−1/3) was tried first: it overstates the way up where Q is a few
 * shares, and trees of 60 came out 6 to 10 % dearer than the plain twin's.)
 */
export class Attacher {
  /** (capacity) potential of every row; refreshed by `refreshPotential`, extended by each attachment. */
  potential: Float64Array;
  private readonly builder: ForestBuilder;
  private readonly room: Room;
  private readonly options: AttachOptions;
  private readonly terminalWeight: TerminalWeight;
  private readonly point = new Float64Array(3);
  private readonly tries = new Float64Array(3 * TRIES);
  private candidate = new Int32Array(256);
  private score = new Float64Array(256);
  private savedRow = new Int32Array(256);
  private saved = new Float64Array(512);
  private savedCount = 0;
  private usual = 1;
  /** Tubes above which a way up has refused this site's share; nothing below them can serve it. */
  private readonly blocked: number[] = [];
  /** How often each outcome was met; for lab notes and benches. */
  readonly tally = { sites: 0, served: 0, candidates: 0, tried: 0, path: 0 };

  constructor(builder: ForestBuilder, room: Room, options: AttachOptions, terminalWeight: TerminalWeight) {
    this.builder = builder;
    this.room = room;
    this.options = options;
    this.terminalWeight = terminalWeight;
    this.potential = new Float64Array(builder.capacity);
  }

  /**
   * Computes every potential of a tree from its loads.
   *
   * @param usual share of a usual terminal, > 0
   * Cost: O(rows)
   */
  refreshPotential(order: Int32Array, usual: number): void {
    const { builder } = this;
    this.follow();
    this.usual = usual;
    for (let k = 0; k < order.length; k++) {
      const row = order[k]!;
      const parent = builder.parent[row]!;
      if (parent < 0) {
        this.potential[row] = 0;
        continue;
      }
      this.potential[row] = this.potential[parent]! + this.lengthOf(row) * this.rise(builder.load[row]!);
    }
  }

  /**
   * Hangs one terminal at a site.
   *
   * @param tree  index of the tree that is to serve it
   * @param share flow share, > 0
   * @returns the terminal's row, or −1 where no tube near by can carry it; the forest is then as before
   */
  attach(tree: number, x: number, y: number, z: number, share: number): number {
    this.follow();
    this.tally.sites++;
    this.blocked.length = 0;
    const first = this.options.first;
    const found = this.search(tree, x, y, z, share, first);
    for (let k = 0; k < found; k++) {
      const row = this.tryCandidate(this.candidate[k]!, x, y, z, share);
      if (row >= 0) return row;
    }
    if (found < first) return -1;
    const more = this.search(tree, x, y, z, share, this.options.second);
    for (let k = 0; k < more; k++) {
      const row = this.tryCandidate(this.candidate[k]!, x, y, z, share);
      if (row >= 0) return row;
    }
    return -1;
  }

  /**
   * As `attach`, with one bend in the new vessel, for a site that no straight vessel reaches: half way, off to six sides
   * by a third and by two thirds of the way, and straight inwards from the site. Some hundred tries, so for sites that
   * must be served.
   */
  attachBent(tree: number, x: number, y: number, z: number, share: number): number {
    this.follow();
    this.blocked.length = 0;
    const found = this.search(tree, x, y, z, share, BENT_CANDIDATES);
    const via = new Float64Array(3);
    const slope = new Float64Array(3);
    const steep = depthGradient(this.room.tissue, x, y, z, slope);
    for (let c = 0; c < found; c++) {
      const row = this.candidate[c]!;
      const count = Math.min(2, this.placeTries(row, x, y, z, share));
      for (let k = 0; k < count; k++) {
        const jx = this.tries[3 * k]!;
        const jy = this.tries[3 * k + 1]!;
        const jz = this.tries[3 * k + 2]!;
        for (let side = 0; side < 15; side++) {
          if (this.blocked.some((top) => this.isBelow(row, top))) break;
          if (side < 12) sideways(jx, jy, jz, x, y, z, side, via);
          else {
            // Straight in from the wall, for a site that lies just deep enough.
            const far = ([0.1, 0.25, 0.5][side - 12]! * span(x - jx, y - jy, z - jz)) / Math.max(steep, 1e-9);
            for (let i = 0; i < 3; i++) via[i] = [x, y, z][i]! + far * slope[i]!;
          }
          const served = this.tryAt(row, jx, jy, jz, x, y, z, share, via);
          if (served >= 0) return served;
        }
      }
    }
    return -1;
  }

  /** Fills `candidate` with tubes of the tree near a point, cheapest first. */
  private search(tree: number, x: number, y: number, z: number, share: number, want: number): number {
    const { builder, room } = this;
    const p = builder.position;
    let reach = 0.8 * room.cell;
    let found = 0;
    for (let round = 0; round < 40; round++) {
      const near = room.near(x, y, z, reach);
      found = 0;
      for (let k = 0; k < near; k++) {
        const row = room.foundRow(k);
        const parent = builder.parent[row]!;
        if (parent < 0 || builder.tree[row] !== tree || room.pinned.has(row)) continue;
        const reached = squaredDistanceToSegment(
          x,
          y,
          z,
          p[3 * parent]!,
          p[3 * parent + 1]!,
          p[3 * parent + 2]!,
          p[3 * row]!,
          p[3 * row + 1]!,
          p[3 * row + 2]!,
        );
        if (reached > reach * reach) continue;
        if (found === this.candidate.length) this.widenCandidates();
        this.candidate[found++] = row;
      }
      if (found >= want || reach > room.span) break;
      reach *= 1.5;
    }
    for (let k = 0; k < found; k++) this.score[k] = this.scoreOf(this.candidate[k]!, x, y, z, share);
    sortByScore(this.candidate, this.score, found);
    return Math.min(found, want);
  }

  /** Power that a terminal adds on a tube at its best junction, in the cost model's unit. */
  private scoreOf(row: number, x: number, y: number, z: number, share: number): number {
    const { builder, point } = this;
    const p = builder.position;
    const parent = builder.parent[row]!;
    const load = builder.load[row]!;
    const below = twoThirds(load);
    const above = twoThirds(load + share);
    const own = twoThirds(share);
    const ax = p[3 * parent]!;
    const ay = p[3 * parent + 1]!;
    const az = p[3 * parent + 2]!;
    const bx = p[3 * row]!;
    const by = p[3 * row + 1]!;
    const bz = p[3 * row + 2]!;
    fermatPoint(ax, ay, az, bx, by, bz, x, y, z, above, below, own, point);
    const jx = point[0]!;
    const jy = point[1]!;
    const jz = point[2]!;
    return (
      above * span(ax - jx, ay - jy, az - jz) +
      below * (span(bx - jx, by - jy, bz - jz) - span(bx - ax, by - ay, bz - az)) +
      own * span(x - jx, y - jy, z - jz) +
      share * this.potential[parent]!
    );
  }

  private tryCandidate(row: number, x: number, y: number, z: number, share: number): number {
    this.tally.candidates++;
    for (let k = 0; k < this.blocked.length; k++) if (this.isBelow(row, this.blocked[k]!)) return -1;
    const count = this.placeTries(row, x, y, z, share);
    for (let k = 0; k < count; k++) {
      const t = this.tries;
      const served = this.tryAt(row, t[3 * k]!, t[3 * k + 1]!, t[3 * k + 2]!, x, y, z, share);
      if (served >= 0) return served;
      if (this.blocked.length > 0 && this.isBelow(row, this.blocked[this.blocked.length - 1]!)) return -1;
    }
    return -1;
  }

  /** Junction places worth a try for a site on a tube, best first. */
  private placeTries(row: number, x: number, y: number, z: number, share: number): number {
    const { builder, point } = this;
    const p = builder.position;
    const parent = builder.parent[row]!;
    const load = builder.load[row]!;
    const ax = p[3 * parent]!;
    const ay = p[3 * parent + 1]!;
    const az = p[3 * parent + 2]!;
    const bx = p[3 * row]!;
    const by = p[3 * row + 1]!;
    const bz = p[3 * row + 2]!;
    fermatPoint(ax, ay, az, bx, by, bz, x, y, z, twoThirds(load + share), twoThirds(load), twoThirds(share), point);
    let count = 0;
    const jx = point[0]!;
    const jy = point[1]!;
    const jz = point[2]!;
    count = this.pushTry(count, row, jx, jy, jz, x, y, z, share);
    // On the tube itself: only the new side vessel can be in anybody's way.
    const ux = bx - ax;
    const uy = by - ay;
    const uz = bz - az;
    const uu = ux * ux + uy * uy + uz * uz;
    let t = uu > 0 ? ((jx - ax) * ux + (jy - ay) * uy + (jz - az) * uz) / uu : 0;
    t = t < 0.25 ? 0.25 : t > 0.75 ? 0.75 : t;
    count = this.pushTry(count, row, ax + t * ux, ay + t * uy, az + t * uz, x, y, z, share);
    const s = t < 0.5 ? 0.7 : 0.3;
    count = this.pushTry(count, row, ax + s * ux, ay + s * uy, az + s * uz, x, y, z, share);
    // Half way to the site, which leaves room at the tube.
    count = this.pushTry(count, row, 0.6 * jx + 0.4 * x, 0.6 * jy + 0.4 * y, 0.6 * jz + 0.4 * z, x, y, z, share);
    return count;
  }

  /** Moves a junction off its three neighbours until each tube is as long as its balls ask, and keeps it if it can be. */
  private pushTry(
    count: number,
    row: number,
    jx: number,
    jy: number,
    jz: number,
    x: number,
    y: number,
    z: number,
    share: number,
  ): number {
    const { builder, room } = this;
    const p = builder.position;
    const parent = builder.parent[row]!;
    const load = builder.load[row]!;
    const grown = builder.radius(row);
    const above =
      builder.exponent === 3
        ? grown * Math.cbrt((load + share) / load)
        : grown * Math.exp(Math.log((load + share) / load) / builder.exponent);
    const own =
      builder.exponent === 3
        ? grown * Math.cbrt(share / load)
        : grown * Math.exp(Math.log(share / load) / builder.exponent);
    const ballA = Math.max(room.ballOf(parent), above);
    const ballB = builder.child[2 * row]! < 0 ? RUN_OUT * grown : Math.max(room.ballOf(row), grown);
    const ballS = RUN_OUT * own;
    for (let pass = 0; pass < 6; pass++) {
      let ax = p[3 * parent]! - jx;
      let ay = p[3 * parent + 1]! - jy;
      let az = p[3 * parent + 2]! - jz;
      const a = span(ax, ay, az);
      let bx = p[3 * row]! - jx;
      let by = p[3 * row + 1]! - jy;
      let bz = p[3 * row + 2]! - jz;
      const b = span(bx, by, bz);
      let sx = x - jx;
      let sy = y - jy;
      let sz = z - jz;
      const c = span(sx, sy, sz);
      const hair = 1e-9 * room.span;
      if (a < hair || b < hair || c < hair) {
        // On a neighbour (a collapsed junction): a hair towards the other two, so that directions have a meaning and
        // the push below finds the least distance that will do.
        const wb = b < hair ? 0 : 1 / b;
        const wa = a < hair ? 0 : 1 / a;
        const wc = c < hair ? 0 : 1 / c;
        const hx = wa * ax + wb * bx + wc * sx;
        const hy = wa * ay + wb * by + wc * sy;
        const hz = wa * az + wb * bz + wc * sz;
        const h = span(hx, hy, hz);
        if (!(h > 1e-6)) return count;
        const step = (4 * hair) / h;
        jx += step * hx;
        jy += step * hy;
        jz += step * hz;
        continue;
      }
      ax /= a;
      ay /= a;
      az /= a;
      bx /= b;
      by /= b;
      bz /= b;
      sx /= c;
      sy /= c;
      sz /= c;
      const ab = ax * bx + ay * by + az * bz;
      const as = ax * sx + ay * sy + az * sz;
      const bs = bx * sx + by * sy + bz * sz;
      const least = room.limits.cosMinAngle;
      const ball = Math.max(
        separationReach(above, grown, Math.min(ab, least)),
        separationReach(above, own, Math.min(as, least)),
        separationReach(grown, own, Math.min(bs, least)),
      );
      const needA = 1.01 * FIT_MARGIN * (ballA + ball);
      const needB = 1.01 * FIT_MARGIN * (ballB + ball);
      const needS = 1.01 * FIT_MARGIN * (ballS + ball);
      if (a >= needA && b >= needB && c >= needS) {
        if (ab > least || as > least || bs > least) return count;
        this.tries[3 * count] = jx;
        this.tries[3 * count + 1] = jy;
        this.tries[3 * count + 2] = jz;
        return count + 1;
      }
      if (a + b < needA + needB && a + c < needA + needS && b + c < needB + needS) return count;
      const pushA = a < needA ? a - needA : 0;
      const pushB = b < needB ? b - needB : 0;
      const pushS = c < needS ? c - needS : 0;
      jx += 1.05 * (pushA * ax + pushB * bx + pushS * sx);
      jy += 1.05 * (pushA * ay + pushB * by + pushS * sy);
      jz += 1.05 * (pushA * az + pushB * bz + pushS * sz);
    }
    return count;
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
    this.follow();
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
    const verdict = this.examine(parent, row, junction, bend, site);
    if (verdict) {
      room.commit();
      this.tally.served++;
      const ownLoad = builder.load[junction]!;
      this.potential[junction] = this.potential[parent]! + span(ax, ay, az) * this.rise(ownLoad);
      this.potential[site] = this.potential[junction]! + span(x - jx, y - jy, z - jz) * this.rise(share);
      if (bend >= 0) this.potential[bend] = 0.5 * (this.potential[junction]! + this.potential[site]!);
      return site;
    }
    this.lower();
    builder.removeTerminal(site);
    if (bend >= 0) builder.removeTerminal(bend);
    builder.spliceOut(junction);
    return -1;
  }

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

  private lower(): void {
    const { builder } = this;
    for (let k = 0; k < this.savedCount; k++) {
      const row = this.savedRow[k]!;
      builder.load[row] = this.saved[2 * k]!;
      builder.weight[row] = this.saved[2 * k + 1]!;
    }
  }

  /** Cost per length and share of one more usual terminal on a tube. */
  private rise(load: number): number {
    return (twoThirds(load + this.usual) - twoThirds(load)) / this.usual;
  }

  private isBelow(row: number, top: number): boolean {
    const { builder } = this;
    for (let at = row; at >= 0; at = builder.parent[at]!) if (at === top) return true;
    return false;
  }

  private lengthOf(row: number): number {
    const { builder } = this;
    const p = builder.position;
    const parent = builder.parent[row]!;
    return span(
      p[3 * row]! - p[3 * parent]!,
      p[3 * row + 1]! - p[3 * parent + 1]!,
      p[3 * row + 2]! - p[3 * parent + 2]!,
    );
  }

  private follow(): void {
    if (this.potential.length >= this.builder.capacity) return;
    const wider = new Float64Array(this.builder.capacity);
    wider.set(this.potential);
    this.potential = wider;
  }

  private widenCandidates(): void {
    const rows = new Int32Array(2 * this.candidate.length);
    rows.set(this.candidate);
    this.candidate = rows;
    const scores = new Float64Array(2 * this.score.length);
    scores.set(this.score);
    this.score = scores;
  }
}

function span(dx: number, dy: number, dz: number): number {
  return Math.sqrt(dx * dx + dy * dy + dz * dz);
}

/** A point half way from j to a site, moved off sideways: six sides by a third of the way, then by two thirds. */
function sideways(
  jx: number,
  jy: number,
  jz: number,
  x: number,
  y: number,
  z: number,
  side: number,
  out: Float64Array,
): void {
  const dx = x - jx;
  const dy = y - jy;
  const dz = z - jz;
  const length = span(dx, dy, dz);
  // Any axis that is not along the way gives a first side; the second is square to both.
  const flat = Math.abs(dx) <= Math.abs(dy) && Math.abs(dx) <= Math.abs(dz);
  const ex = flat ? 0 : dy;
  const ey = flat ? dz : -dx;
  const ez = flat ? -dy : 0;
  const e = 1 / Math.max(span(ex, ey, ez), 1e-300);
  const fx = (dy * ez - dz * ey) * e;
  const fy = (dz * ex - dx * ez) * e;
  const fz = (dx * ey - dy * ex) * e;
  const angle = ((side % 6) * Math.PI) / 3;
  const far = side < 6 ? 0.33 : 0.66;
  const c = Math.cos(angle) * far * length * e;
  const s = Math.sin(angle) * far;
  out[0] = 0.5 * (jx + x) + c * ex + s * fx;
  out[1] = 0.5 * (jy + y) + c * ey + s * fy;
  out[2] = 0.5 * (jz + z) + c * ez + s * fz;
}

function twoThirds(x: number): number {
  const root = Math.cbrt(x);
  return root * root;
}

/** Insertion sort; ties keep the lower row first, so that the order does not depend on how rows were found. */
function sortByScore(rows: Int32Array, scores: Float64Array, count: number): void {
  for (let i = 1; i < count; i++) {
    const row = rows[i]!;
    const score = scores[i]!;
    let j = i - 1;
    while (j >= 0 && (scores[j]! > score || (scores[j] === score && rows[j]! > row))) {
      rows[j + 1] = rows[j]!;
      scores[j + 1] = scores[j]!;
      j--;
    }
    rows[j + 1] = row;
    scores[j + 1] = score;
  }
}
