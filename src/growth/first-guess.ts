import { askedDrop } from '../sizing/size-tree.ts';
import type { Spec } from '../spec/types.ts';
import type { Tissue } from '../tissue/tissue.ts';

/** Over the radius that the law gives: a tree that outgrows its stub is planted anew, one with a stub too wide is not. */
const GENEROUS = 1.6;

/**
 * First vessel's radius to plant with before a tree has shown one: amply what drops half of what is asked on the way to
 * the far corner of the tissue's box.
 *
 * @returns m
 */
export function firstGuess(spec: Spec, t: number, tissue: Tissue): number {
  const tree = spec.trees[t]!;
  const [x, y, z] = tree.inlet.position;
  const dx = Math.max(tissue.max[0] - x, x - tissue.min[0]);
  const dy = Math.max(tissue.max[1] - y, y - tissue.min[1]);
  const dz = Math.max(tissue.max[2] - z, z - tissue.min[2]);
  const length = Math.sqrt(dx * dx + dy * dy + dz * dz);
  const drop = askedDrop(tree);
  return (
    GENEROUS *
    Math.sqrt(Math.sqrt((2 * 8 * spec.blood.viscosity.value * 0.5 * length * tree.inlet.flow) / (Math.PI * drop)))
  );
}
