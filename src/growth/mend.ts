import type { Room } from '../room/room.ts';
import type { ForestBuilder } from '../tree/builder.ts';

/** Steps a node tries, in radii of the vessel that does not fit. */
const STEPS = [0.4, 0.9, 1.8, 3.5] as const;
/** The corners and faces of a cube, as directions. */
const DIRECTIONS: readonly (readonly [number, number, number])[] = directions();

/**
 * Makes a vessel fit again by moving one node near by, where that is enough: an end of it or of the vessel in its way.
 * Terminals and stubs stay.
 *
 * @param headroom as for `Room.certify`
 * @returns true if the vessel now fits; else nothing has changed
 */
export function mendByMoving(builder: ForestBuilder, room: Room, row: number, headroom: number): boolean {
  const nodes: number[] = [];
  const consider = (node: number) => {
    if (node >= 0 && builder.parent[node]! >= 0 && !room.pinned.has(node) && builder.childCount(node) > 0) {
      if (!nodes.includes(node)) nodes.push(node);
    }
  };
  consider(row);
  consider(builder.parent[row]!);
  if (room.blocker >= 0) {
    consider(room.blocker);
    consider(builder.parent[room.blocker]!);
  }
  const radius = builder.radius(row);
  const p = builder.position;
  for (const node of nodes) {
    const x = p[3 * node]!;
    const y = p[3 * node + 1]!;
    const z = p[3 * node + 2]!;
    for (const step of STEPS) {
      for (const [ux, uy, uz] of DIRECTIONS) {
        p[3 * node] = x + step * radius * ux;
        p[3 * node + 1] = y + step * radius * uy;
        p[3 * node + 2] = z + step * radius * uz;
        if (fitsMoved(builder, room, row, node, headroom)) return true;
      }
    }
    p[3 * node] = x;
    p[3 * node + 1] = y;
    p[3 * node + 2] = z;
  }
  return false;
}

function fitsMoved(builder: ForestBuilder, room: Room, row: number, node: number, headroom: number): boolean {
  const a = builder.child[2 * node]!;
  const b = builder.child[2 * node + 1]!;
  room.begin();
  room.move(node);
  room.move(a);
  if (b >= 0) room.move(b);
  if (!room.fits(node) || !room.fits(builder.parent[node]!) || !room.fits(a)) return false;
  if (b >= 0 && !room.fits(b)) return false;
  if (!room.certify(row, headroom)) return false;
  if (!room.certify(node, headroom) || !room.certify(a, headroom)) return false;
  if (b >= 0 && !room.certify(b, headroom)) return false;
  // Headroom was given since the first look.
  if (!room.fits(row) || !room.fits(builder.parent[row]!)) return false;
  if (!room.fits(node) || !room.fits(builder.parent[node]!) || !room.fits(a)) return false;
  if (b >= 0 && !room.fits(b)) return false;
  room.commit();
  return true;
}

function directions(): [number, number, number][] {
  const list: [number, number, number][] = [];
  for (let i = -1; i <= 1; i++) {
    for (let j = -1; j <= 1; j++) {
      for (let k = -1; k <= 1; k++) {
        const size = Math.abs(i) + Math.abs(j) + Math.abs(k);
        if (size === 0 || size === 2) continue;
        const scale = 1 / Math.sqrt(size);
        list.push([i * scale, j * scale, k * scale]);
      }
    }
  }
  return list;
}
