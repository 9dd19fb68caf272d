import { describe, expect, it } from 'vitest';
import { depthGradient } from '../../../src/tissue/depth-gradient.ts';
import { cube } from '../../support/surfaces.ts';
import { surfaceTissue, tissueOf } from '../../support/tissue-twins.ts';

describe('gradient of the depth', () => {
  const out = new Float64Array(3);
  it('points to the centre of a sphere, inside and outside', () => {
    const tissue = tissueOf({ shape: 'sphere', center: [1, 2, 3], radius: 0.004 });
    for (const k of [0.001, 0.01]) {
      const length = depthGradient(tissue, 1 + 0.48 * k, 2 - 0.6 * k, 3 + 0.64 * k, out);
      expect(length).toBeCloseTo(1, 5);
      expect(out[0]).toBeCloseTo(-0.48, 5);
      expect(out[1]).toBeCloseTo(0.6, 5);
      expect(out[2]).toBeCloseTo(-0.64, 5);
    }
  });
  it('is the inward normal near a face, and none at the deepest point', () => {
    const tissue = surfaceTissue(cube(), 'mm');
    expect(depthGradient(tissue, 4e-4, 0.95e-3, 6e-4, out)).toBeCloseTo(1, 6);
    expect(out[1]).toBeCloseTo(-1, 6);
    expect(depthGradient(tissue, 5e-4, 5e-4, 5e-4, out)).toBeLessThan(1e-6);
  });
});
