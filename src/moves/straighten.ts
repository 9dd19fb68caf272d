import type { Room } from '../room/room.ts';
import type { ForestBuilder } from '../tree/builder.ts';

/** Takes a bend out where the straight vessel fits; true if it is gone. */
export function straighten(builder: ForestBuilder, room: Room, node: number): boolean {
  const only = builder.child[2 * node]!;
  const above = builder.parent[node]!;
  if (above < 0 || room.pinned.has(node)) return false;
  const p = builder.position;
  const x = p[3 * node]!;
  const y = p[3 * node + 1]!;
  const z = p[3 * node + 2]!;
  builder.spliceOut(node);
  room.begin();
  room.move(only);
  if (room.fits(above) && room.fits(only) && room.certify(only, 1.0) && room.fits(above) && room.fits(only)) {
    room.commit();
    return true;
  }
  // The row comes back as it went, and with it what it was certified for.
  builder.insertAbove(only, x, y, z);
  room.begin();
  return false;
}
