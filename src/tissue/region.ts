import type { Triple } from '../spec/types.ts';
import type { HoldsTube } from './tissue.ts';

/**
 * What one shape, or shapes put together, answer before a volume is known. The promises of `Tissue` hold for every
 * region: depth is 1-Lipschitz, its sign exact, its size never more than the true distance to the boundary.
 */
export interface Region {
  /** m; a box that holds the region. */
  readonly min: Triple;
  readonly max: Triple;
  /** True where the region is known to be convex. */
  readonly convex: boolean;
  /** m³ in closed form, or null where only integration can tell. */
  readonly volume: number | null;
  /** Signed distance to the boundary in m, positive inside. */
  depth(x: number, y: number, z: number): number;
  /** depth ≥ need, and never disagrees with it. */
  deeperThan(x: number, y: number, z: number, need: number): boolean;
  /** depth ≤ limit, and never disagrees with it; what a difference asks of the part taken away. */
  shallowerThan(x: number, y: number, z: number, limit: number): boolean;
  /** As in `Tissue`. */
  readonly holdsTube?: HoldsTube | undefined;
  /** As in `Depths` of tube.ts. */
  readonly roughDepth?: ((x: number, y: number, z: number, need: number) => number) | undefined;
}

/** A region whose depth is so cheap that the two questions just ask it. */
export function plainRegion(
  min: Triple,
  max: Triple,
  convex: boolean,
  volume: number | null,
  depth: (x: number, y: number, z: number) => number,
): Region {
  return {
    min,
    max,
    convex,
    volume,
    depth,
    deeperThan: (x, y, z, need) => depth(x, y, z) >= need,
    shallowerThan: (x, y, z, limit) => depth(x, y, z) <= limit,
  };
}

/** m; half the diagonal of a box of these edges: no point of the box is farther from its centre. */
export function halfDiagonal(dx: number, dy: number, dz: number): number {
  return 0.5 * Math.sqrt(dx * dx + dy * dy + dz * dz);
}
