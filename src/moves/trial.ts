import type { Room } from '../room/room.ts';
import type { ForestBuilder } from '../tree/builder.ts';

/**
 * A change that is made, looked at as a whole, and taken back unless everything that it touches fits: what a new or a
 * cut vessel adds on its way to the root, and the tubes at its junction.
 */
export class Trial {
  private readonly builder: ForestBuilder;
  private readonly room: Room;
  private readonly headroom: number;
  private savedRow = new Int32Array(256);
  private saved = new Float64Array(512);
  private savedCount = 0;
  /** Tubes above which a way up has refused the share in hand; nothing below them can serve it. */
  private readonly blocked: number[] = [];

  /** @param headroom radius certified over radius needed, so that a vessel may gain a little without a new look */
  constructor(builder: ForestBuilder, room: Room, headroom: number) {
    this.builder = builder;
    this.room = room;
    this.headroom = headroom;
  }

  /** Forgets which ways up have refused; called before another share is in hand. */
  forget(): void {
    this.blocked.length = 0;
  }

  isBlocked(row: number): boolean {
    for (let k = 0; k < this.blocked.length; k++) if (this.builder.isBelow(row, this.blocked[k]!)) return true;
    return false;
  }

  /**
   * Whether all that a hanging touches fits: its tubes, their ends, and every vessel on the way to the root. What was
   * granted stands in the room's transaction: commit it, or put the forest back.
   *
   * @param parent, row, junction the tube parent→row was parted by the junction
   * @param site    the new terminal or the top of the subtree that hangs on it
   * @param bend    node between junction and site, or −1
   * @param sibling row whose tube runs straight where the subtree was cut, or −1
   */
  examine(parent: number, row: number, junction: number, site: number, bend: number, sibling: number): boolean {
    const { builder, room, headroom } = this;
    room.begin();
    room.move(junction);
    room.move(site);
    room.move(row);
    if (bend >= 0) room.move(bend);
    if (sibling >= 0) room.move(sibling);
    // Cheap questions first.
    if (!(room.fits(junction) && room.fits(parent) && room.fits(row) && room.fits(site))) return false;
    if (sibling >= 0 && !(room.fits(sibling) && room.fits(builder.parent[sibling]!))) return false;
    if (bend >= 0 && !(room.fits(bend) && room.certify(bend, headroom))) return false;
    if (!(room.certify(site, headroom) && room.certify(junction, headroom) && room.certify(row, headroom)))
      return false;
    if (sibling >= 0 && !room.certify(sibling, headroom)) return false;
    let above = parent;
    let raised = 0;
    while (builder.parent[above]! >= 0) {
      if (room.outgrown(above)) {
        raised++;
        if (!room.certify(above, headroom)) {
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
            if (above !== parent) this.blocked.push(above);
            return false;
          }
        }
        above = builder.parent[above]!;
      }
      // Fits may cut reserves back only to today's radii, so what was certified stays certified.
    }
    if (sibling >= 0 && !(room.fits(sibling) && room.fits(builder.parent[sibling]!))) return false;
    return (
      room.fits(junction) && room.fits(row) && room.fits(parent) && room.fits(site) && (bend < 0 || room.fits(bend))
    );
  }

  /** Adds load and weight on the way from a row to the root, remembering what stood there. */
  raise(row: number, share: number, weight: number): void {
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
  lower(): void {
    const { builder } = this;
    for (let k = 0; k < this.savedCount; k++) {
      const row = this.savedRow[k]!;
      builder.load[row] = this.saved[2 * k]!;
      builder.weight[row] = this.saved[2 * k + 1]!;
    }
  }
}
