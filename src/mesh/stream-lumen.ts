import { GrowingSurface } from './growing-surface.ts';
import type { LumenPlan } from './lumen-plan.ts';

/** Triangles of a lumen that are handed over at once; only the first `triangles` count, until the next piece. */
export interface LumenPiece {
  readonly triangles: number;
  /** (3v) m */
  readonly position: Float64Array;
  /** (3f) vertices of this piece. */
  readonly triangle: Int32Array;
  /** (f) index into the patches. */
  readonly patch: Int32Array;
  /** (f) number of the nearest vessel. */
  readonly vessel: Int32Array;
}

/** Vertices of a piece before it is handed over. */
const PIECE = 1 << 16;

/**
 * The lumen surface that `buildLumen` builds, piece by piece, so that a surface may be larger than memory. Corners that two
 * pieces share have the same bits in both. What kept it from what a mesh promises stands in the plan's `problems` at the end.
 *
 * @yields pieces; what one is made of is used again for the next
 * Cost: as buildLumen; memory for the plan, some 300 bytes a vessel, and one piece.
 */
export function* lumenPieces(plan: LumenPlan): Generator<LumenPiece> {
  const { forest, strips, children } = plan;
  const out = new GrowingSurface(2 * PIECE, 4 * PIECE);
  const rings = new Int32Array(forest.count).fill(-1);
  const piece = (): LumenPiece => {
    const { triangles, position, triangle, patch, vessel } = out;
    out.vertices = 0;
    out.triangles = 0;
    return { triangles, position, triangle, patch, vessel };
  };
  let cap = 1;
  for (let row = 0; row < forest.count; row++) {
    if (out.vertices > PIECE) yield piece();
    if (forest.parent[row]! < 0) {
      // The vessel that leaves a root begins with its cap's rim.
      const vessel = plan.vesselAt(row);
      rings[vessel] = strips.addRing(out, vessel, 0);
      plan.addCap(out, rings, cap++);
      continue;
    }
    rings[row] = strips.add(out, row);
    if (!plan.isInner(row)) plan.addCap(out, rings, cap++);
    else {
      for (let i = children.start[row]!; i < children.start[row + 1]!; i++) {
        const child = children.list[i]!;
        rings[child] = strips.addRing(out, child, 0);
      }
      plan.addPatch(out, rings, row);
    }
  }
  yield piece();
}
