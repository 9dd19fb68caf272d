import type { Triple } from '../spec/types.ts';
import type { Region } from './region.ts';
import { clearOfConvex, marchTube, tubeInside } from './tube.ts';

/**
 * Everything in at least one part.
 *
 * Depth is the largest depth among the parts: exact outside; inside a lower bound, short where parts overlap (two
 * parts that only touch have depth 0 along the seam, so no vessel passes it: let parts overlap where it should).
 *
 * @param parts at least one
 */
export function unionOf(parts: readonly Region[]): Region {
  if (parts.length === 1) return parts[0]!;
  const union: Region = {
    min: fold(parts, 'min', Math.min),
    max: fold(parts, 'max', Math.max),
    convex: false,
    volume: null,
    depth(x, y, z) {
      let most = Number.NEGATIVE_INFINITY;
      for (let i = 0; i < parts.length; i++) {
        const d = parts[i]!.depth(x, y, z);
        if (d > most) most = d;
      }
      return most;
    },
    deeperThan(x, y, z, need) {
      for (let i = 0; i < parts.length; i++) if (parts[i]!.deeperThan(x, y, z, need)) return true;
      return false;
    },
    shallowerThan(x, y, z, limit) {
      for (let i = 0; i < parts.length; i++) if (!parts[i]!.shallowerThan(x, y, z, limit)) return false;
      return true;
    },
    holdsTube(ax, ay, az, bx, by, bz, need) {
      for (let i = 0; i < parts.length; i++) if (tubeInside(parts[i]!, ax, ay, az, bx, by, bz, need)) return true;
      return marchTube(union, ax, ay, az, bx, by, bz, need);
    },
  };
  return union;
}

/**
 * Everything in all parts. Depth is the least depth among the parts: exact inside (where the parts' are); outside its
 * size is a lower bound.
 *
 * @param parts at least one
 * @returns     a region whose box is empty (some min > max) where the parts' boxes do not meet
 */
export function intersectionOf(parts: readonly Region[]): Region {
  if (parts.length === 1) return parts[0]!;
  return {
    min: fold(parts, 'min', Math.max),
    max: fold(parts, 'max', Math.min),
    convex: parts.every((part) => part.convex),
    volume: null,
    depth(x, y, z) {
      let least = Number.POSITIVE_INFINITY;
      for (let i = 0; i < parts.length; i++) {
        const d = parts[i]!.depth(x, y, z);
        if (d < least) least = d;
      }
      return least;
    },
    deeperThan(x, y, z, need) {
      for (let i = 0; i < parts.length; i++) if (!parts[i]!.deeperThan(x, y, z, need)) return false;
      return true;
    },
    shallowerThan(x, y, z, limit) {
      for (let i = 0; i < parts.length; i++) if (parts[i]!.shallowerThan(x, y, z, limit)) return true;
      return false;
    },
    holdsTube(ax, ay, az, bx, by, bz, need) {
      for (let i = 0; i < parts.length; i++) if (!tubeInside(parts[i]!, ax, ay, az, bx, by, bz, need)) return false;
      return true;
    },
  };
}

/** Everything in `of` and in none of `minus`. Depth is min(depth of `of`, −depth of each of `minus`). */
export function differenceOf(of: Region, minus: readonly Region[]): Region {
  return minus.length === 0 ? of : intersectionOf([of, ...minus.map((part) => outsideOf(part, of))]);
}

/** All space but `part`, as far as `within` reaches; convex is never claimed. */
function outsideOf(part: Region, within: Region): Region {
  return {
    min: within.min,
    max: within.max,
    convex: false,
    volume: null,
    depth: (x, y, z) => -part.depth(x, y, z),
    deeperThan: (x, y, z, need) => part.shallowerThan(x, y, z, -need),
    shallowerThan: (x, y, z, limit) => part.deeperThan(x, y, z, -limit),
    holdsTube: part.convex
      ? (ax, ay, az, bx, by, bz, need) => clearOfConvex(part.depth, ax, ay, az, bx, by, bz, need)
      : undefined,
  };
}

function fold(parts: readonly Region[], side: 'min' | 'max', pick: (a: number, b: number) => number): Triple {
  const out: [number, number, number] = [...parts[0]![side]];
  for (const part of parts) for (const axis of [0, 1, 2] as const) out[axis] = pick(out[axis], part[side][axis]);
  return out;
}
