import { describe, expect, it } from 'vitest';
import { randomStream } from '../../../src/core/random.ts';
import type { Triple } from '../../../src/spec/types.ts';
import { deepestPoint } from '../../../src/tissue/deepest-point.ts';
import { notchedCube, torus } from '../../support/surfaces.ts';
import { surfaceTissue, tissueOf } from '../../support/tissue-twins.ts';

describe('deepest point', () => {
  const hollow = tissueOf({
    shape: 'difference',
    of: { shape: 'sphere', center: [0, 0, 0], radius: 1 },
    minus: [{ shape: 'sphere', center: [0.2, 0, 0], radius: 0.6 }],
  });
  it.each([
    ['box', tissueOf({ shape: 'box', min: [0, 0, 0], max: [3, 2, 5] }), 1],
    ['ellipsoid', tissueOf({ shape: 'ellipsoid', center: [1, 1, 1], radii: [3, 0.2, 5] }), 0.2],
    // Across from the hollow: from −1 to 0.2 − 0.6.
    ['off-centre hollow', hollow, 0.3],
    // The floor under the notch is 0.4 thick, but its joints with the arms hold a ball that touches the corner of the
    // notch (0.3, 0.4), the floor and the side: (0.3 − r)² + (0.4 − r)² = r², r = 0.7 − √0.24.
    ['notched cube', surfaceTissue(notchedCube()), 0.7 - Math.sqrt(0.24)],
  ])('of a %s: depth and bound close in on the inradius', (_, tissue, inradius) => {
    const found = deepestPoint(tissue);
    expect(found.depth).toBe(tissue.depth(found.x, found.y, found.z));
    expect(found.depth).toBeLessThanOrEqual(inradius * (1 + 1e-12));
    expect(found.depth).toBeGreaterThan(0.98 * inradius);
    expect(found.bound).toBeGreaterThanOrEqual(inradius);
  });

  it('is found wherever the deeper of two balls lies', () => {
    const random = randomStream('two', 'balls');
    for (let i = 0; i < 40; i++) {
      const at = (): Triple => [8 * random.next(), 8 * random.next(), 8 * random.next()];
      const tissue = tissueOf({
        shape: 'union',
        parts: [
          { shape: 'sphere', center: at(), radius: 0.5 },
          { shape: 'sphere', center: at(), radius: 0.55 },
        ],
      });
      expect(deepestPoint(tissue).depth).toBeGreaterThan(0.98 * 0.55);
    }
  });

  it('of flat ridges and thin walls: still a point, with an honest bound', () => {
    const wall = tissueOf({
      shape: 'difference',
      of: { shape: 'sphere', center: [0, 0, 0], radius: 1 },
      minus: [{ shape: 'sphere', center: [0, 0, 0], radius: 0.98 }],
    });
    for (const [tissue, inradius] of [
      [wall, 0.01],
      [tissueOf({ shape: 'box', min: [0, 0, 0], max: [100, 100, 1] }), 0.5],
      [surfaceTissue(torus(2, 0.5, 48, 24)), 0.5],
    ] as const) {
      const found = deepestPoint(tissue);
      expect(found.depth).toBeGreaterThan(0.8 * inradius);
      expect(found.bound).toBeGreaterThanOrEqual(0.95 * inradius);
    }
  });
});
