import { type Memory, ownMemory } from '../core/memory.ts';
import { boxesApart, squaredDistanceBetweenSegments } from '../core/segments.ts';
import type { StateIn, StateOut } from '../core/state.ts';
import { TubeGrid, type TubeGridView } from '../core/tube-grid.ts';
import type { Tissue } from '../tissue/tissue.ts';
import { tubeInside } from '../tissue/tube.ts';
import { type ForestBuilder, FREED } from '../tree/builder.ts';
import { FIT_MARGIN, RUN_OUT, separationReach } from './reach.ts';

export interface RoomLimits {
  /** m between walls of vessels that share no node. */
  readonly gap: number;
  /** Cosine of the least angle between two vessels that leave a node. */
  readonly cosMinAngle: number;
  /** Cosine of the least angle between the two sides of a bend. */
  readonly cosMinBend: number;
}

/** Most cells of the grid; at 10⁷ terminals a few tubes a cell. */
const MOST_CELLS = 1 << 25;

/** Why a vessel did not fit. */
export type Refusal = 'none' | 'tissue' | 'vessel' | 'junction';

/** What a reader in another thread needs of a room. */
export interface RoomView {
  readonly reserve: Float64Array;
  readonly grid: TubeGridView;
  readonly pinned: readonly number[];
}

/**
 * The space a forest stands in: which radii its vessels may take where they are.
 *
 * Every vessel has a *reserve*: a radius, never less than its own, up to which it has been certified. The invariant:
 * tubes at their reserves keep the gap, stay in the tissue and fit at their junctions. While vessels only shrink, it
 * holds for free; a vessel about to outgrow its reserve is certified again, and where a neighbour's reserve is in the
 * way, that one is cut back to what the neighbour needs today.
 *
 * Changes are tried in a transaction: `begin`, change the builder, `certify` / `fits` what changed, then `commit`, or
 * put the builder back and begin anew. Reserves written between count for the transaction alone.
 */
export class Room {
  readonly builder: ForestBuilder;
  readonly tissue: Tissue;
  readonly limits: RoomLimits;
  /** Why the last certification failed, and the vessel that was in the way (−1 if none). */
  refusal: Refusal = 'none';
  blocker = -1;
  /** Stubs: first vessels whose place and direction the inlet sets. */
  readonly pinned = new Set<number>();
  /** Those of them that lead in from the boundary and need not lie in the tissue. */
  readonly exempt = new Set<number>();
  /** Radii are taken this much wider in all that is asked, ≥ 1, so that what moves leaves room for growth. */
  slack = 1;
  private reserve: Float64Array;
  private listed: Float64Array;
  private pending: Float64Array;
  private stamp: Int32Array;
  private round = 1;
  private touched: number[] = [];
  private fresh: number[] = [];
  private readonly memory: Memory;
  private grid: TubeGrid;
  private readonly floor: number;
  /** Radii are asked of the tissue this much wider: `tubeInside` may be off by a thousandth where it marches. */
  private readonly wall: number;
  /** m; longest edge of the tissue's box. */
  readonly span: number;

  /**
   * @param cell   m, edge of the first grid's cells
   * @param memory where columns that may be shared are kept
   */
  constructor(builder: ForestBuilder, tissue: Tissue, limits: RoomLimits, cell: number, memory: Memory = ownMemory) {
    this.memory = memory;
    this.builder = builder;
    this.tissue = tissue;
    this.limits = limits;
    const n = builder.capacity;
    this.reserve = new Float64Array(memory(8 * n));
    this.listed = new Float64Array(n);
    this.pending = new Float64Array(n);
    this.stamp = new Int32Array(n);
    this.wall = tissue.convex ? 1 + 1e-9 : 1.002;
    this.grid = new TubeGrid(tissue.min, tissue.max, cell, MOST_CELLS, memory);
    this.span = Math.max(tissue.max[0] - tissue.min[0], tissue.max[1] - tissue.min[1], tissue.max[2] - tissue.min[2]);
    // Rounding must not eat the gap: judges measure in another order.
    this.floor = 1e-12 * this.span;
  }

  get cell(): number {
    return this.grid.cell;
  }

  /** What another thread needs to ask this room; stale after the next change. */
  view(): RoomView {
    return { reserve: this.reserve, grid: this.grid.view(), pinned: [...this.pinned] };
  }

  /** Answers from another room's columns from now on; nothing may be changed through this one. */
  adopt(view: RoomView): void {
    this.reserve = view.reserve;
    this.grid.adopt(view.grid);
    this.pinned.clear();
    for (const row of view.pinned) this.pinned.add(row);
    if (this.stamp.length < view.reserve.length) this.stamp = new Int32Array(view.reserve.length);
  }

  /**
   * Lists every living tube anew, in a grid of another cell, and forgets a transaction that was not committed: what the
   * room answers from here on follows from the forest, the reserves and the cell alone.
   */
  rebuild(cell: number): void {
    this.begin();
    this.grid = new TubeGrid(this.tissue.min, this.tissue.max, cell, MOST_CELLS, this.memory);
    for (let row = 0; row < this.builder.count; row++) {
      if (this.builder.parent[row]! >= 0) this.list(row);
      else this.listed[row] = 0;
    }
    this.grid.pack();
  }

  /** Saves what `restore` needs; to be asked right after `rebuild`. */
  save(out: StateOut): void {
    out.list('cell', 'f64', [this.cell]);
    out.put('reserve', this.reserve.subarray(0, this.builder.count));
  }

  /** Becomes the room that was saved, of the builder that was saved with it. */
  restore(from: StateIn): void {
    const n = this.builder.capacity;
    this.reserve = new Float64Array(this.memory(8 * n));
    this.listed = new Float64Array(n);
    this.pending = new Float64Array(n);
    this.stamp = new Int32Array(n);
    this.round = 1;
    from.reals('reserve', this.reserve);
    this.rebuild(from.reals('cell')[0]!);
  }

  begin(): void {
    this.follow();
    this.round++;
    this.touched.length = 0;
    this.fresh.length = 0;
    this.refusal = 'none';
    this.blocker = -1;
  }

  /** Tells that a row's tube is new or has moved: others must be measured against it though it is not listed there yet. */
  move(row: number): void {
    this.follow();
    this.fresh.push(row);
    this.set(row, this.slack * this.builder.radius(row));
  }

  commit(): void {
    for (const row of this.touched) {
      if (this.builder.parent[row]! < 0) continue;
      this.reserve[row] = this.pending[row]!;
      if (this.reserve[row]! > this.listed[row]!) this.list(row);
    }
    for (const row of this.fresh) if (this.builder.parent[row]! >= 0) this.list(row);
    this.round++;
    this.touched.length = 0;
    this.fresh.length = 0;
  }

  /** m; the radius a row is certified for. */
  reserveOf(row: number): number {
    return this.stamp[row] === this.round ? this.pending[row]! : this.reserve[row]!;
  }

  /** Whether a row's radius has outgrown its reserve. */
  outgrown(row: number): boolean {
    return this.builder.radius(row) > this.reserveOf(row);
  }

  /** Whether this transaction has changed a row's reserve. */
  raised(row: number): boolean {
    return this.stamp[row] === this.round;
  }

  /** Rows listed within `reach` (m) of a point; read them with `foundRow` before the next question. */
  near(x: number, y: number, z: number, reach: number): number {
    return this.grid.gather(x, y, z, x, y, z, reach);
  }

  /** Rows listed within `reach` (m) of a segment; read them with `foundRow` before the next question. */
  nearTube(ax: number, ay: number, az: number, bx: number, by: number, bz: number, reach: number): number {
    return this.grid.gather(ax, ay, az, bx, by, bz, reach);
  }

  foundRow(k: number): number {
    return this.grid.found[k]!;
  }

  /** m; `ball`, or 0 where an angle is too small. */
  ballOf(node: number): number {
    const ball = this.ball(node);
    return ball < 0 ? 0 : ball;
  }

  /** Cuts every reserve back to the radius of today; for stages in which no radius changes. */
  settle(): void {
    this.follow();
    const { builder } = this;
    for (let row = 0; row < builder.count; row++)
      if (builder.parent[row]! >= 0) this.reserve[row] = builder.radius(row);
  }

  /**
   * Certifies a tube where it stands: in the tissue, and clear of every tube that shares no node with it, for its
   * radius times `headroom` or as much of that as there is room for.
   */
  certify(row: number, headroom: number): boolean {
    const { builder, grid } = this;
    const p = builder.position;
    const parent = builder.parent[row]!;
    const ax = p[3 * parent]!;
    const ay = p[3 * parent + 1]!;
    const az = p[3 * parent + 2]!;
    const bx = p[3 * row]!;
    const by = p[3 * row + 1]!;
    const bz = p[3 * row + 2]!;
    const least = this.slack * builder.radius(row);
    let granted = least * headroom;
    if (!this.exempt.has(row) && !tubeInside(this.tissue, ax, ay, az, bx, by, bz, this.wall * granted)) {
      if (headroom <= 1 || !tubeInside(this.tissue, ax, ay, az, bx, by, bz, this.wall * least)) {
        return this.refuse('tissue', -1);
      }
      granted = least;
    }
    const gap = this.limits.gap + this.floor;
    const listed = grid.gather(ax, ay, az, bx, by, bz, granted + gap);
    for (let k = listed + this.fresh.length - 1; k >= 0; k--) {
      const other = k < listed ? grid.found[k]! : this.fresh[k - listed]!;
      const top = builder.parent[other]!;
      // Freed rows, roots, itself and tubes that share a node are nobody's neighbours.
      if (top < 0 || other === row || top === parent || top === row || other === parent) continue;
      const cx = p[3 * top]!;
      const cy = p[3 * top + 1]!;
      const cz = p[3 * top + 2]!;
      const dx = p[3 * other]!;
      const dy = p[3 * other + 1]!;
      const dz = p[3 * other + 2]!;
      const reserve = this.reserveOf(other);
      if (boxesApart(ax, ay, az, bx, by, bz, cx, cy, cz, dx, dy, dz, granted + gap + reserve)) continue;
      const squared = squaredDistanceBetweenSegments(ax, ay, az, bx, by, bz, cx, cy, cz, dx, dy, dz);
      const room = Math.sqrt(squared) - gap;
      const allowed = room - reserve;
      if (allowed >= granted) continue;
      if (allowed >= least) {
        granted = allowed;
        continue;
      }
      if (room - least < this.slack * builder.radius(other)) return this.refuse('vessel', other);
      granted = least;
      this.set(other, room - least);
    }
    this.set(row, granted);
    // Wider than it is listed: until the commit lists it anew it must be looked at without being found.
    if (granted > this.listed[row]!) this.fresh.push(row);
    return true;
  }

  /**
   * Whether all tubes at a node fit there: no angle below the least, and each longer than the balls at its ends.
   * Where reserves are too wide for that they are cut back to today's radii.
   */
  fits(node: number): boolean {
    if (this.fitsAsReserved(node)) return true;
    this.tighten(node);
    if (this.fitsAsReserved(node)) return true;
    return this.refuse('junction', node);
  }

  /** m; radius of the ball around a node outside which its tubes are apart, or −1 where an angle is too small. */
  ball(node: number): number {
    const { builder } = this;
    const c0 = builder.child[2 * node]!;
    const c1 = builder.child[2 * node + 1]!;
    const parent = builder.parent[node]!;
    if (parent < 0) return RUN_OUT * this.reserveOf(c0);
    const r = this.reserveOf(node);
    if (c0 < 0) return RUN_OUT * r;
    const p = builder.position;
    const x = p[3 * node]!;
    const y = p[3 * node + 1]!;
    const z = p[3 * node + 2]!;
    let px = p[3 * parent]! - x;
    let py = p[3 * parent + 1]! - y;
    let pz = p[3 * parent + 2]! - z;
    let inverse = 1 / Math.sqrt(px * px + py * py + pz * pz);
    px *= inverse;
    py *= inverse;
    pz *= inverse;
    let ax = p[3 * c0]! - x;
    let ay = p[3 * c0 + 1]! - y;
    let az = p[3 * c0 + 2]! - z;
    inverse = 1 / Math.sqrt(ax * ax + ay * ay + az * az);
    ax *= inverse;
    ay *= inverse;
    az *= inverse;
    const ra = this.reserveOf(c0);
    const pa = px * ax + py * ay + pz * az;
    if (c1 < 0) {
      if (!(pa <= this.limits.cosMinBend)) return -1;
      return separationReach(r, ra, pa);
    }
    let bx = p[3 * c1]! - x;
    let by = p[3 * c1 + 1]! - y;
    let bz = p[3 * c1 + 2]! - z;
    inverse = 1 / Math.sqrt(bx * bx + by * by + bz * bz);
    bx *= inverse;
    by *= inverse;
    bz *= inverse;
    const rb = this.reserveOf(c1);
    const pb = px * bx + py * by + pz * bz;
    const ab = ax * bx + ay * by + az * bz;
    const least = this.limits.cosMinAngle;
    // Written so that NaN, from two nodes in one place, is refused too.
    if (!(pa <= least && pb <= least && ab <= least)) return -1;
    return Math.max(separationReach(r, ra, pa), separationReach(r, rb, pb), separationReach(ra, rb, ab));
  }

  private fitsAsReserved(node: number): boolean {
    const { builder } = this;
    const own = this.ball(node);
    if (own < 0) return false;
    const parent = builder.parent[node]!;
    if (parent >= 0 && !this.longEnough(parent, node, own + this.ballOf(parent))) return false;
    for (let k = 0; k < 2; k++) {
      const child = builder.child[2 * node + k]!;
      if (child >= 0 && !this.longEnough(node, child, own + this.ballOf(child))) return false;
    }
    return true;
  }

  private longEnough(from: number, to: number, balls: number): boolean {
    const p = this.builder.position;
    const dx = p[3 * to]! - p[3 * from]!;
    const dy = p[3 * to + 1]! - p[3 * from + 1]!;
    const dz = p[3 * to + 2]! - p[3 * from + 2]!;
    const least = FIT_MARGIN * balls + this.floor;
    return dx * dx + dy * dy + dz * dz >= least * least;
  }

  /** Cuts the reserves around a node, and around its neighbours, back to today's radii. */
  private tighten(node: number): void {
    const { builder } = this;
    this.tightenAt(node);
    const parent = builder.parent[node]!;
    if (parent >= 0) this.tightenAt(parent);
    for (let k = 0; k < 2; k++) {
      const child = builder.child[2 * node + k]!;
      if (child >= 0) this.tightenAt(child);
    }
  }

  private tightenAt(node: number): void {
    const { builder } = this;
    if (builder.parent[node]! >= 0) this.cutBack(node);
    for (let k = 0; k < 2; k++) {
      const child = builder.child[2 * node + k]!;
      if (child >= 0) this.cutBack(child);
    }
  }

  private cutBack(row: number): void {
    const radius = this.slack * this.builder.radius(row);
    if (radius < this.reserveOf(row)) this.set(row, radius);
  }

  private set(row: number, radius: number): void {
    if (this.stamp[row] !== this.round) {
      this.stamp[row] = this.round;
      this.touched.push(row);
    }
    this.pending[row] = radius;
  }

  private refuse(why: Refusal, blocker: number): false {
    this.refusal = why;
    this.blocker = blocker;
    return false;
  }

  private list(row: number): void {
    const { builder } = this;
    const parent = builder.parent[row]!;
    if (parent === FREED) return;
    const p = builder.position;
    // A quarter more than needed, so that a vessel that gains a little is not listed again each time.
    const radius = 1.25 * Math.max(this.reserve[row]!, builder.radius(row));
    this.listed[row] = radius;
    this.grid.add(
      row,
      p[3 * parent]!,
      p[3 * parent + 1]!,
      p[3 * parent + 2]!,
      p[3 * row]!,
      p[3 * row + 1]!,
      p[3 * row + 2]!,
      radius,
    );
  }

  /** Columns follow the builder's when it has grown. */
  private follow(): void {
    const n = this.builder.capacity;
    if (this.reserve.length >= n) return;
    const reserve = new Float64Array(this.memory(8 * n));
    reserve.set(this.reserve);
    this.reserve = reserve;
    this.listed = widened(this.listed, n);
    this.pending = widened(this.pending, n);
    const stamp = new Int32Array(n);
    stamp.set(this.stamp);
    this.stamp = stamp;
  }
}

function widened(old: Float64Array, n: number): Float64Array {
  const next = new Float64Array(n);
  next.set(old);
  return next;
}
