import type { Forest } from '../tree/forest.ts';
import { GrowingSurface } from './growing-surface.ts';
import type { LumenMesh } from './lumen.ts';
import { type LumenOptions, LumenPlan } from './lumen-plan.ts';

/**
 * Builds the lumen surface of a forest: plain tubes of staggered rings, a patch of triangles on the filleted union of
 * tubes at every inner node, a flat cap at every root and terminal. One closed surface a tree.
 *
 * Ring corners lie a little outside the vessel's circle, so that caps and tubes have the circle's area.
 *
 * @returns the mesh; where a vessel is too short for its junctions, or a patch missed the least angle, that is listed
 *          in `problems` and the mesh there may cross itself
 * @throws  InputError for options out of range
 * Cost:    per vessel, O(length / radius · around); per junction some milliseconds at 24 around.
 */
export function buildLumen(forest: Forest, options: LumenOptions = {}): LumenMesh {
  const plan = new LumenPlan(forest, options);
  const { around, strips, patches } = plan;
  const out = new GrowingSurface(forest.count * around * 16, forest.count * around * 32);
  const rings = new Int32Array(forest.count).fill(-1);
  for (let row = 0; row < forest.count; row++) if (forest.parent[row]! >= 0) rings[row] = strips.add(out, row);
  for (let index = 1; index < patches.length; index++) plan.addCap(out, rings, index);
  for (let row = 0; row < forest.count; row++) if (plan.isInner(row)) plan.addPatch(out, rings, row);
  return {
    position: out.position.slice(0, 3 * out.vertices),
    triangle: out.triangle.slice(0, 3 * out.triangles),
    patch: out.patch.slice(0, out.triangles),
    vessel: out.vessel.slice(0, out.triangles),
    row: out.row.slice(0, out.vertices),
    along: out.along.slice(0, out.vertices),
    patches,
    problems: plan.problems,
    around,
  };
}
