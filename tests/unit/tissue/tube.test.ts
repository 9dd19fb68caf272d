import { describe, expect, it } from 'vitest';
import { randomStream } from '../../../src/core/random.ts';
import type { Triple } from '../../../src/spec/types.ts';
import type { Tissue } from '../../../src/tissue/tissue.ts';
import { leastDepth, tubeInside } from '../../../src/tissue/tube.ts';
import { bean, moved, notchedCube, torus } from '../../support/surfaces.ts';
import { boxPoint, surfaceTissue, tissueOf } from '../../support/tissue-twins.ts';

/** Least depth among many points of a segment. */
function sampled(tissue: Tissue, a: Triple, b: Triple, points = 800): number {
  let least = Number.POSITIVE_INFINITY;
  for (let i = 0; i <= points; i++) {
    const t = i / points;
    const at = (axis: 0 | 1 | 2): number => a[axis] + t * (b[axis] - a[axis]);
    least = Math.min(least, tissue.depth(at(0), at(1), at(2)));
  }
  return least;
}

const shell = tissueOf({
  shape: 'difference',
  of: { shape: 'ellipsoid', center: [0, 0, 0], radii: [3, 2, 2] },
  minus: [{ shape: 'ellipsoid', center: [0, 0, 0], radii: [2.5, 1.5, 1.6] }],
});
const lobes = tissueOf({
  shape: 'union',
  parts: [
    { shape: 'sphere', center: [0, 0, 0], radius: 1 },
    { shape: 'sphere', center: [1.6, 0, 0], radius: 1 },
    { shape: 'cylinder', from: [0, 0, 0], to: [0, 3, 0], radius: 0.4 },
  ],
});
const tissues: readonly (readonly [string, Tissue])[] = [
  ['hollow ellipsoid', shell],
  ['lobes', lobes],
  ['notched cube', surfaceTissue(notchedCube())],
  ['bent bean', surfaceTissue(moved(bean(3), ([x, y, z]) => [x, y + x * x, z]))],
  ['torus', surfaceTissue(torus(2, 0.5, 24, 12))],
];

describe('containment along a tube', () => {
  it('sees a notch between two ends that lie inside', () => {
    const tissue = surfaceTissue(notchedCube());
    expect(tissue.deeperThan(0.15, 0.5, 0.8, 0.1)).toBe(true);
    expect(tissue.deeperThan(0.85, 0.5, 0.8, 0.1)).toBe(true);
    expect(tubeInside(tissue, 0.15, 0.5, 0.8, 0.85, 0.5, 0.8, 0.1)).toBe(false);
    expect(tubeInside(tissue, 0.15, 0.5, 0.2, 0.85, 0.5, 0.2, 0.1)).toBe(true);
    expect(tubeInside(tissue, 0.15, 0.5, 0.2, 0.85, 0.5, 0.2, 0.21)).toBe(false);
    // Down the left arm: its half width is 0.15.
    expect(tubeInside(tissue, 0.15, 0.5, 0.8, 0.15, 0.5, 0.2, 0.147)).toBe(true);
    expect(tubeInside(tissue, 0.15, 0.5, 0.8, 0.15, 0.5, 0.2, 0.1502)).toBe(false);
  });

  it('sees a sheet thinner than any fixed step', () => {
    const cut = tissueOf({
      shape: 'difference',
      of: { shape: 'box', min: [0, 0, 0], max: [1, 1, 1] },
      minus: [{ shape: 'box', min: [0.61803, -1, -1], max: [0.6180301, 2, 2] }],
    });
    expect(tubeInside(cut, 0.1, 0.5, 0.5, 0.9, 0.5, 0.5, 0.01)).toBe(false);
    expect(tubeInside(cut, 0.1, 0.5, 0.5, 0.6, 0.5, 0.5, 0.01)).toBe(true);
    expect(leastDepth(cut, 0.1, 0.5, 0.5, 0.9, 0.5, 0.5, 1e-3)).toBeLessThan(1e-3);
  });

  it('takes ends only where the tissue is convex, points for segments, and refuses NaN', () => {
    const box = tissueOf({ shape: 'box', min: [0, 0, 0], max: [1, 1, 1] });
    expect(tubeInside(box, 0.25, 0.25, 0.25, 0.75, 0.75, 0.75, 0.25)).toBe(true);
    expect(tubeInside(box, 0.25, 0.25, 0.25, 0.75, 0.75, 0.76, 0.25)).toBe(false);
    expect(leastDepth(box, 0.25, 0.5, 0.5, 0.5, 0.5, 0.9, 1)).toBeCloseTo(0.1, 15);
    expect(tubeInside(shell, 2.75, 0, 0, 2.75, 0, 0, 0.2)).toBe(true);
    expect(tubeInside(shell, 2.75, 0, 0, 2.75, 0, 0, 0.3)).toBe(false);
    for (const tissue of [box, shell, tissues[3]![1]])
      expect(tubeInside(tissue, 0, 0, 0, Number.NaN, 0, 0, 0.1)).toBe(false);
  });

  it('grazing a flat wall within the careful rule is refused, never taken wrongly', () => {
    const tissue = surfaceTissue(notchedCube());
    expect(tubeInside(tissue, 0.1, 0.05, 0.2, 0.1, 0.95, 0.2, 0.0999)).toBe(false);
    expect(tubeInside(tissue, 0.1, 0.1, 0.2, 0.1, 0.9, 0.2, 0.096)).toBe(true);
    expect(tubeInside(tissue, 0.1, 0.2, 0.2, 0.1, 0.8, 0.2, 0.1001)).toBe(false);
  });

  it('runs along flat walls of combined shapes as near as asked', () => {
    const block = tissueOf({
      shape: 'difference',
      of: { shape: 'box', min: [0, 0, 0], max: [8, 8, 4] },
      minus: [{ shape: 'cylinder', from: [4, 4, -1], to: [4, 4, 5], radius: 1 }],
    });
    const joined = tissueOf({
      shape: 'union',
      parts: [
        { shape: 'box', min: [0, 0, 0], max: [8, 8, 4] },
        { shape: 'sphere', center: [8, 4, 2], radius: 2 },
      ],
    });
    for (const tissue of [block, joined]) {
      expect(tubeInside(tissue, 0.5, 0.125, 2, 7.5, 0.125, 2, 0.125)).toBe(true);
      expect(tubeInside(tissue, 0.5, 0.125, 2, 7.5, 0.125, 2, 0.1252)).toBe(false);
    }
    // Past the hole, 0.25 from it at (4, 5.25), 0.1 from the wall at the end.
    expect(tubeInside(block, 1, 5.25, 2, 7.9, 5.25, 2, 0.0999)).toBe(true);
    expect(tubeInside(block, 1, 5.25, 2, 7.5, 5.25, 2, 0.25)).toBe(true);
    expect(tubeInside(block, 1, 5.25, 2, 7.5, 5.25, 2, 0.2506)).toBe(false);
    expect(tubeInside(block, 1, 5, 2, 7.5, 5, 2, 0)).toBe(true);
    expect(tubeInside(block, 1, 4.999999, 2, 7.5, 4.999999, 2, 0)).toBe(false);
    // Through the seam of the union and out into its second part, 0.5 short of whose end it stops.
    expect(tubeInside(joined, 6, 4, 2, 9.5, 4, 2, 0.45)).toBe(true);
    expect(tubeInside(joined, 6, 4, 2, 9.5, 4, 2, 0.55)).toBe(false);
  });

  it.each(tissues)(
    '%s: what is taken is deep enough to 1e-3, what is refused is not, but for the careful rule',
    (_, tissue) => {
      const random = randomStream('tube', 'tries');
      const count = { taken: 0, refused: 0 };
      for (let i = 0; i < 30_000 && (count.taken < 120 || count.refused < 120); i++) {
        const a = boxPoint(tissue, random);
        const b = boxPoint(tissue, random).map((v, k) => a[k]! + 0.7 * (v - a[k]!)) as unknown as Triple;
        const need = 0.15 * random.next();
        if (!tissue.deeperThan(...a, need) || !tissue.deeperThan(...b, need)) continue;
        const taken = tubeInside(tissue, ...a, ...b, need);
        count[taken ? 'taken' : 'refused']++;
        if (count[taken ? 'taken' : 'refused'] > 120) continue;
        const least = sampled(tissue, a, b);
        const length = Math.hypot(b[0] - a[0], b[1] - a[1], b[2] - a[2]);
        if (taken) expect(least).toBeGreaterThanOrEqual(need * (1 - 1e-3));
        else expect(least).toBeLessThan(need + length / 256);
        const found = leastDepth(tissue, ...a, ...b, 1e-3);
        expect(found).toBeLessThanOrEqual(least + 1e-3);
        // Samples lie length/800 apart, so the least of them is at most half of that too high.
        expect(found).toBeGreaterThanOrEqual(least - length / 1600);
      }
      expect(count.taken).toBeGreaterThanOrEqual(60);
      expect(count.refused).toBeGreaterThanOrEqual(60);
    },
  );
});
