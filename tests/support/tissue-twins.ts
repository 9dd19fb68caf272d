import type { TriangleSurface } from '../../src/core/surface.ts';
import type { Shape, Triple } from '../../src/spec/types.ts';
import { buildTissue } from '../../src/tissue/build-tissue.ts';
import type { Tissue } from '../../src/tissue/tissue.ts';

/** Slow, obvious twins of what src/tissue computes, and small builders. */

export function tissueOf(shape: Shape, surfaces: Readonly<Record<string, TriangleSurface>> = {}): Tissue {
  return buildTissue(shape, new Map(Object.entries(surfaces)));
}

export function surfaceTissue(surface: TriangleSurface, unit: 'm' | 'mm' | 'um' = 'm'): Tissue {
  return tissueOf({ shape: 'surface', file: 'a.stl', unit }, { 'a.stl': surface });
}

/** Is a point in a primitive or a combination of them? By the definition of each, no distances. */
export function contains(shape: Shape, p: Triple): boolean {
  switch (shape.shape) {
    case 'box':
      return p.every((v, i) => v >= shape.min[i]! && v <= shape.max[i]!);
    case 'sphere':
      return Math.hypot(...p.map((v, i) => v - shape.center[i]!)) <= shape.radius;
    case 'ellipsoid':
      return Math.hypot(...p.map((v, i) => (v - shape.center[i]!) / shape.radii[i]!)) <= 1;
    case 'cylinder': {
      const axis = shape.to.map((v, i) => v - shape.from[i]!);
      const off = p.map((v, i) => v - shape.from[i]!);
      const share = dot(axis, off) / dot(axis, axis);
      const across = off.map((v, i) => v - share * axis[i]!);
      return share >= 0 && share <= 1 && Math.hypot(...across) <= shape.radius;
    }
    case 'union':
      return shape.parts.some((part) => contains(part, p));
    case 'intersection':
      return shape.parts.every((part) => contains(part, p));
    case 'difference':
      return contains(shape.of, p) && !shape.minus.some((part) => contains(part, p));
    case 'surface':
      throw new Error('no twin');
  }
}

function dot(a: readonly number[], b: readonly number[]): number {
  return a.reduce((sum, v, i) => sum + v * b[i]!, 0);
}

/** Distance to the nearest triangle, all of them tried: into the prism over the face, else to the three edges. */
export function bruteDistance(surface: TriangleSurface, p: Triple): number {
  let best = Number.POSITIVE_INFINITY;
  for (let t = 0; t < surface.triangle.length; t += 3) {
    const [a, b, c] = [0, 1, 2].map((k) => cornerOf(surface, surface.triangle[t + k]!)) as [Triple, Triple, Triple];
    const n = cross(sub(b, a), sub(c, a));
    const within = [
      [a, b],
      [b, c],
      [c, a],
    ].every(([from, to]) => dot(cross(n, sub(to!, from!)), sub(p, from!)) >= 0);
    if (within) best = Math.min(best, Math.abs(dot(n, sub(p, a))) / Math.hypot(...n));
    for (const [from, to] of [
      [a, b],
      [b, c],
      [c, a],
    ] as const) {
      const u = sub(to, from);
      const s = Math.min(1, Math.max(0, dot(u, sub(p, from)) / dot(u, u)));
      best = Math.min(best, Math.hypot(...from.map((v, i) => v + s * u[i]! - p[i]!)));
    }
  }
  return best;
}

/** Inside by the parity of crossings of a ray in an odd direction (Möller & Trumbore 1997, from memory). */
export function rayInside(surface: TriangleSurface, p: Triple): boolean {
  const d: Triple = [0.36211, 0.48717, 0.79471];
  let crossings = 0;
  for (let t = 0; t < surface.triangle.length; t += 3) {
    const [a, b, c] = [0, 1, 2].map((k) => cornerOf(surface, surface.triangle[t + k]!)) as [Triple, Triple, Triple];
    const [u, v] = [sub(b, a), sub(c, a)];
    const h = cross(d, v);
    const det = dot(u, h);
    if (Math.abs(det) < 1e-14) continue;
    const s = sub(p, a);
    const share = dot(s, h) / det;
    const q = cross(s, u);
    const other = dot(d, q) / det;
    if (share >= 0 && other >= 0 && share + other <= 1 && dot(v, q) / det > 0) crossings++;
  }
  return crossings % 2 === 1;
}

function cornerOf({ position }: TriangleSurface, row: number): Triple {
  return [position[3 * row]!, position[3 * row + 1]!, position[3 * row + 2]!];
}

function sub(a: Triple, b: Triple): Triple {
  return [a[0] - b[0], a[1] - b[1], a[2] - b[2]];
}

function cross(a: Triple, b: Triple): Triple {
  return [a[1] * b[2] - a[2] * b[1], a[2] * b[0] - a[0] * b[2], a[0] * b[1] - a[1] * b[0]];
}

/** A point of the tissue's box stretched about its centre. */
export function boxPoint(tissue: Tissue, random: { next(): number }, stretch = 1): Triple {
  return [0, 1, 2].map((i) => {
    const [lo, hi] = [tissue.min[i]!, tissue.max[i]!];
    return 0.5 * (lo + hi) + stretch * (random.next() - 0.5) * (hi - lo);
  }) as unknown as Triple;
}
