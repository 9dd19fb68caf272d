import type { Room } from '../room/room.ts';
import type { ForestBuilder } from '../tree/builder.ts';
import { NodeLook, type TubeWeight } from './node-look.ts';
import { straighten } from './straighten.ts';

/**
 * Moves nodes to where their tubes cost less. A move is made only if it lowers the cost and everything it touches fits:
 * the forest is feasible after every move.
 */
export class NodeMover {
  readonly look: NodeLook;
  private readonly builder: ForestBuilder;
  private readonly room: Room;
  private readonly slack: number;

  /** @param slack radii that a moved node leaves room for over today's, ≥ 1 */
  constructor(builder: ForestBuilder, room: Room, slack = 1) {
    this.builder = builder;
    this.room = room;
    this.slack = slack;
    this.look = new NodeLook(builder, room, slack);
  }

  /**
   * Looks for a better place for a junction or bend and moves it there; roots, stubs and terminals stay.
   *
   * @param least share of its tubes' cost below which a gain is not worth a look, ≥ 0
   * @returns true if it has moved, or a bend has gone
   */
  move(row: number, weight: TubeWeight, least: number): boolean {
    if (this.straightens(row)) return true;
    if (!this.look.look(row, weight, least)) return false;
    const { place } = this.look;
    return this.put(row, place[0]!, place[1]!, place[2]!);
  }

  /** Takes a bend out where the straight vessel fits. */
  straightens(row: number): boolean {
    const { builder, room } = this;
    return builder.parent[row]! >= 0 && builder.childCount(row) === 1 && straighten(builder, room, row);
  }

  /** Moves a node to a place if all that it touches fits there; else all stays as it was. */
  put(row: number, x: number, y: number, z: number): boolean {
    const { builder, room } = this;
    const p = builder.position;
    const top = builder.parent[row]!;
    const a = builder.child[2 * row]!;
    const b = builder.child[2 * row + 1]!;
    const oldX = p[3 * row]!;
    const oldY = p[3 * row + 1]!;
    const oldZ = p[3 * row + 2]!;
    p[3 * row] = x;
    p[3 * row + 1] = y;
    p[3 * row + 2] = z;
    room.begin();
    room.move(row);
    room.move(a);
    if (b >= 0) room.move(b);
    if (
      room.fits(row) &&
      room.fits(top) &&
      room.fits(a) &&
      (b < 0 || room.fits(b)) &&
      room.certify(row, this.slack) &&
      room.certify(a, this.slack) &&
      (b < 0 || room.certify(b, this.slack)) &&
      (this.slack === 1 || (room.fits(row) && room.fits(top) && room.fits(a) && (b < 0 || room.fits(b))))
    ) {
      room.commit();
      return true;
    }
    p[3 * row] = oldX;
    p[3 * row + 1] = oldY;
    p[3 * row + 2] = oldZ;
    return false;
  }
}
