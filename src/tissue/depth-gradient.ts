import type { Tissue } from './tissue.ts';

/** Step of the differences as a share of the box's diagonal: rounding and curvature both stay below 1e-5 of the slope. */
const STEP = 1e-6;

/**
 * Direction in which the depth rises, by central differences.
 *
 * @param out (3) written: the gradient, of length 1 where depth is an exact distance, less across a ridge
 * @returns   its length; 0 at a point that is as deep as all round it
 * Cost:      six depths, allocates nothing.
 */
export function depthGradient(tissue: Tissue, x: number, y: number, z: number, out: Float64Array): number {
  const dx = tissue.max[0] - tissue.min[0];
  const dy = tissue.max[1] - tissue.min[1];
  const dz = tissue.max[2] - tissue.min[2];
  const h = STEP * Math.sqrt(dx * dx + dy * dy + dz * dz);
  const gx = (tissue.depth(x + h, y, z) - tissue.depth(x - h, y, z)) / (2 * h);
  const gy = (tissue.depth(x, y + h, z) - tissue.depth(x, y - h, z)) / (2 * h);
  const gz = (tissue.depth(x, y, z + h) - tissue.depth(x, y, z - h)) / (2 * h);
  out[0] = gx;
  out[1] = gy;
  out[2] = gz;
  return Math.sqrt(gx * gx + gy * gy + gz * gz);
}
