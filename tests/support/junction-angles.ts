import { FIT_MARGIN } from '../../src/room/reach.ts';
import type { Room } from '../../src/room/room.ts';

export interface JunctionAngles {
  readonly row: number;
  /** Degrees; each child's deviation from its best angle to the prolonged parent. */
  readonly deviation: readonly [number, number];
  /** Whether no constraint binds: see `measureJunctions`. */
  readonly free: boolean;
}

/** What a tube may yet gain before something binds. */
const MARGIN = 1.02;
/** Degrees above the least angle. */
const ANGLE_MARGIN = 1;

/**
 * Angles of all junctions against the best for their radii.
 *
 * Best: cos θ₁ = (r₀⁴ + r₁⁴ − r₂⁴)/(2 r₀² r₁²), θ₂ likewise: least volume, and least power under the cube law. Source: C. D.
 * Murray (1926), J Gen Physiol 9:835; from memory, derived anew.
 *
 * A junction is free where nothing would bind if it moved a little: its three tubes are 2 % longer than their balls ask
 * and could each be 2 % wider where they run, and all angles at it and at its neighbours are 1° above the least.
 */
export function measureJunctions(room: Room): JunctionAngles[] {
  const { builder } = room;
  const list: JunctionAngles[] = [];
  const wide = new Map<number, boolean>();
  const isWide = (row: number): boolean => {
    let known = wide.get(row);
    if (known === undefined) {
      room.begin();
      known = room.certify(row, MARGIN) && room.reserveOf(row) >= MARGIN * (1 - 1e-9) * builder.radius(row);
      room.begin();
      wide.set(row, known);
    }
    return known;
  };
  for (let row = 0; row < builder.count; row++) {
    const top = builder.parent[row]!;
    const a = builder.child[2 * row]!;
    const b = builder.child[2 * row + 1]!;
    if (top < 0 || b < 0) continue;
    const into = way(room, top, row);
    const [r0, r1, r2] = [row, a, b].map((tube) => builder.radius(tube) ** 2) as [number, number, number];
    const best = [(r0 * r0 + r1 * r1 - r2 * r2) / (2 * r0 * r1), (r0 * r0 + r2 * r2 - r1 * r1) / (2 * r0 * r2)];
    const deviation = [a, b].map((child, k) =>
      Math.abs(degrees(dot(into, way(room, row, child))) - degrees(best[k]!)),
    ) as [number, number];
    const tubes = [row, a, b];
    const free =
      ![row, a, b].some((node) => room.pinned.has(node)) &&
      tubes.every((tube) => isLong(room, tube) && isWide(tube)) &&
      [row, top, a, b].every((node) => isOpen(room, node));
    list.push({ row, deviation, free });
  }
  return list;
}

type Way = readonly [number, number, number];
const dot = (u: Way, v: Way) => u[0] * v[0] + u[1] * v[1] + u[2] * v[2];
const degrees = (cosine: number) => (Math.acos(Math.min(1, Math.max(-1, cosine))) * 180) / Math.PI;

/** Unit vector. */
function way(room: Room, from: number, to: number): Way {
  const p = room.builder.position;
  const d = [0, 1, 2].map((k) => p[3 * to + k]! - p[3 * from + k]!);
  const size = Math.hypot(...d);
  return d.map((x) => x / size) as unknown as Way;
}

function isLong(room: Room, tube: number): boolean {
  const { builder } = room;
  const top = builder.parent[tube]!;
  const p = builder.position;
  const length = Math.hypot(...[0, 1, 2].map((k) => p[3 * tube + k]! - p[3 * top + k]!));
  return length > MARGIN * FIT_MARGIN * (room.ballOf(tube) + room.ballOf(top));
}

/** Whether all angles at a node are well above the least. */
function isOpen(room: Room, node: number): boolean {
  const { builder, limits } = room;
  const arms = [builder.parent[node]!, builder.child[2 * node]!, builder.child[2 * node + 1]!].filter(
    (end) => end >= 0,
  );
  const least = degrees(arms.length === 3 ? limits.cosMinAngle : limits.cosMinBend);
  for (let i = 0; i < arms.length; i++) {
    for (let j = 0; j < i; j++) {
      if (degrees(dot(way(room, node, arms[i]!), way(room, node, arms[j]!))) < least + ANGLE_MARGIN) return false;
    }
  }
  return true;
}
