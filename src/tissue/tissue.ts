import type { Perfusion } from './perfusion.ts';

/**
 * A region of space that vessels may fill. All shapes, whatever they are made of, answer these questions.
 */
export interface Tissue {
  /** m; the least box that is known to hold the tissue. */
  readonly min: readonly [number, number, number];
  readonly max: readonly [number, number, number];
  /** m³, and its relative standard error (0 where it is exact). */
  readonly volume: number;
  readonly volumeError: number;
  /** Demand for blood over the tissue. */
  readonly perfusion: Perfusion;
  /** True where the tissue is known to be convex: the depth along a segment is then least at an end. */
  readonly convex: boolean;
  /**
   * Signed distance to the boundary in m, positive inside. Inside it is exact or a lower bound, never more than the
   * true distance; it changes no faster than position (Lipschitz 1); its sign is exact.
   */
  depth(x: number, y: number, z: number): number;
  /** True if depth(x, y, z) ≥ need; may be far cheaper than `depth`, never disagrees with it. */
  deeperThan(x: number, y: number, z: number, need: number): boolean;
  /**
   * Where the shape can settle a whole tube better than marching along it: the answer of `tubeInside` (see there), which
   * is the function to call.
   */
  readonly holdsTube?: HoldsTube | undefined;
}

/** True if the depth is at least `need` along the segment a–b, short by no more than 10⁻³·need. */
export type HoldsTube = (
  ax: number,
  ay: number,
  az: number,
  bx: number,
  by: number,
  bz: number,
  need: number,
) => boolean;
