import { squaredDistanceToSegment } from '../core/segments.ts';
import { fermatPoint } from '../physics/fermat.ts';
import type { Room } from '../room/room.ts';
import type { ForestBuilder } from '../tree/builder.ts';
import type { PerLength } from './per-length.ts';
import type { Potential } from './potential.ts';
import { span } from './span.ts';

/**
 * Tubes on which a terminal might hang, by what it would add to the power there.
 *
 * Cost model: power per length of a tube is Q^(2/3) (least power, constant viscosity). A terminal on the tube P→C costs
 * the change of three tubes at their best junction, plus what its flow costs on the way from the root to P, which is
 * kept as a potential. So one candidate costs O(1), whatever is in its way: room is not asked here.
 */
export class Candidates {
  /** Rows of the tubes last found, cheapest first; replaced by a longer one where they are many. */
  rows = new Int32Array(256);
  /** Power that each adds at its own tube alone, the way up apart; a lower bound of what the junction really costs there. */
  local = new Float64Array(256);
  private scores = new Float64Array(256);
  private readonly builder: ForestBuilder;
  private readonly room: Room;
  private readonly potential: Potential;
  private readonly perLength: PerLength;
  private readonly point = new Float64Array(3);

  constructor(builder: ForestBuilder, room: Room, potential: Potential, perLength: PerLength) {
    this.perLength = perLength;
    this.builder = builder;
    this.room = room;
    this.potential = potential;
  }

  /**
   * Looks for tubes of a tree near a point, in wider and wider rounds until there are enough.
   *
   * @param share flow share of the terminal that is to hang on one of them, > 0
   * @param want  most tubes kept, ≥ 1
   * @param own   m, ≥ 0; radius that the terminal has at least
   * @param top   row of a cut subtree, whose tubes do not count; −1: none
   * @param least share that a tube must carry to be looked at
   * @param start m, reach of the first round; 0: about a cell
   * @param most  m, reach beyond which no tube is looked at
   * @returns     number found, ≤ want; they are in `rows`, cheapest first, until the next search; −1 where a vessel
   *              stands in the place itself
   */
  search(
    tree: number,
    x: number,
    y: number,
    z: number,
    share: number,
    want: number,
    own = 0,
    top = -1,
    least = 0,
    start = 0,
    most = Infinity,
  ): number {
    const { builder, room } = this;
    const p = builder.position;
    let reach = start > 0 ? start : 0.8 * room.cell;
    let found = 0;
    for (let round = 0; round < 40; round++) {
      const near = room.near(x, y, z, reach);
      found = 0;
      for (let k = 0; k < near; k++) {
        const row = room.foundRow(k);
        const parent = builder.parent[row]!;
        if (parent < 0) continue;
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
        if (own > 0) {
          const widest = own + room.limits.gap + room.reserveOf(row);
          if (reached < widest * widest) {
            const wide = own + room.limits.gap + builder.radius(row);
            if (reached < wide * wide) return -1;
          }
        }
        if (reached > reach * reach || builder.tree[row] !== tree || room.pinned.has(row)) continue;
        if (top >= 0 && (builder.load[row]! < least || builder.isBelow(row, top))) continue;
        if (found === this.rows.length) this.widen();
        this.rows[found++] = row;
      }
      if (found >= want || reach > room.span || reach >= most) break;
      reach *= 1.5;
    }
    for (let k = 0; k < found; k++) {
      const row = this.rows[k]!;
      const local = this.localCost(row, x, y, z, share);
      this.local[k] = local;
      this.scores[k] = local + share * this.potential.values[builder.parent[row]!]!;
    }
    sortByScore(this.rows, this.scores, this.local, found);
    return Math.min(found, want);
  }

  /** Power that a terminal adds at a tube with its best junction, in the cost model's unit; the way up is not in it. */
  private localCost(row: number, x: number, y: number, z: number, share: number): number {
    const { builder, point } = this;
    const p = builder.position;
    const parent = builder.parent[row]!;
    const load = builder.load[row]!;
    const tree = builder.tree[row]!;
    const below = this.perLength(load, tree);
    const above = this.perLength(load + share, tree);
    const own = this.perLength(share, tree);
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
      own * span(x - jx, y - jy, z - jz)
    );
  }

  private widen(): void {
    const rows = new Int32Array(2 * this.rows.length);
    rows.set(this.rows);
    this.rows = rows;
    const scores = new Float64Array(2 * this.scores.length);
    scores.set(this.scores);
    this.scores = scores;
    const local = new Float64Array(2 * this.local.length);
    local.set(this.local);
    this.local = local;
  }
}

/** Insertion sort; ties keep the lower row first, so that the order does not depend on how rows were found. */
function sortByScore(rows: Int32Array, scores: Float64Array, local: Float64Array, count: number): void {
  for (let i = 1; i < count; i++) {
    const row = rows[i]!;
    const score = scores[i]!;
    const own = local[i]!;
    let j = i - 1;
    while (j >= 0 && (scores[j]! > score || (scores[j] === score && rows[j]! > row))) {
      rows[j + 1] = rows[j]!;
      scores[j + 1] = scores[j]!;
      local[j + 1] = local[j]!;
      j--;
    }
    rows[j + 1] = row;
    scores[j + 1] = score;
    local[j + 1] = own;
  }
}
