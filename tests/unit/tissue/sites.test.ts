import { describe, expect, it } from 'vitest';
import { randomStream } from '../../../src/core/random.ts';
import type { Triple } from '../../../src/spec/types.ts';
import { createSites, type Sites } from '../../../src/tissue/sites.ts';
import { expectedSites, spacedSites } from '../../../src/tissue/spaced-sites.ts';
import type { Tissue } from '../../../src/tissue/tissue.ts';
import { bean } from '../../support/surfaces.ts';
import { boxPoint, surfaceTissue, tissueOf } from '../../support/tissue-twins.ts';

/** Least distance among the first n points, all pairs tried. */
function leastDistance(position: Float64Array, n: number): number {
  let least = Number.POSITIVE_INFINITY;
  for (let i = 0; i < n; i++)
    for (let j = 0; j < i; j++) {
      const dx = position[3 * i]! - position[3 * j]!;
      const dy = position[3 * i + 1]! - position[3 * j + 1]!;
      const dz = position[3 * i + 2]! - position[3 * j + 2]!;
      const squared = dx * dx + dy * dy + dz * dz;
      if (squared < least) least = squared;
    }
  return Math.sqrt(least);
}

function take(sites: Sites, n: number, minDepth: number): Float64Array {
  for (let i = 0; i < n; i++) expect(sites.next(minDepth)).toBe(true);
  return sites.positions();
}

const box = tissueOf({ shape: 'box', min: [0, 0, 0], max: [2, 1, 1] });
const ball = tissueOf({ shape: 'sphere', center: [5, 5, 5], radius: 0.003 });
const wall = tissueOf({
  shape: 'difference',
  of: { shape: 'sphere', center: [0, 0, 0], radius: 1 },
  minus: [{ shape: 'sphere', center: [0, 0, 0], radius: 0.8 }],
});
const kidney = surfaceTissue(bean(3), 'mm');
const tissues: readonly (readonly [string, Tissue])[] = [
  ['box', box],
  ['ball', ball],
  ['wall', wall],
  ['bean', kidney],
];

describe.each(tissues)('progressive sites in a %s', (_, tissue) => {
  const points = take(createSites(tissue, randomStream('seed', 'sites')), 4096, 0);

  it('lie inside and apart: every beginning of 2^k points keeps 0.64 (volume/n)^(1/3)', () => {
    for (let i = 0; i < points.length; i += 3)
      if (!(tissue.depth(points[i]!, points[i + 1]!, points[i + 2]!) >= 0)) expect.unreachable();
    // Measured 0.66 to 0.85; plain random points come to 0.05 at 4096.
    for (let n = 4; n <= 4096; n *= 2)
      expect(leastDistance(points, n) / Math.cbrt(tissue.volume / n)).toBeGreaterThan(0.64);
  });

  it('leave no large hole: a point of the tissue has a site within 1.25 (volume/n)^(1/3)', () => {
    const random = randomStream('holes', 'sites');
    for (const n of [64, 512, 4096]) {
      let largest = 0;
      for (let i = 0; i < 400; i++) {
        const p = boxPoint(tissue, random);
        if (!tissue.deeperThan(...p, 0)) continue;
        let near = Number.POSITIVE_INFINITY;
        for (let j = 0; j < 3 * n; j += 3)
          near = Math.min(near, Math.hypot(points[j]! - p[0], points[j + 1]! - p[1], points[j + 2]! - p[2]));
        largest = Math.max(largest, near);
      }
      expect(largest / Math.cbrt(tissue.volume / n)).toBeLessThan(1.25);
    }
  });
});

describe('progressive sites', () => {
  it('fill octants more evenly than chance: chi-square far below its mean for random points', () => {
    const cube = tissueOf({ shape: 'box', min: [0, 0, 0], max: [1, 1, 1] });
    const points = take(createSites(cube, randomStream('octants', 'sites')), 8192, 0);
    for (const n of [256, 1024, 8192]) {
      const cells = new Float64Array(64);
      for (let i = 0; i < 3 * n; i += 3)
        cells[Math.floor(4 * points[i]!) + 4 * Math.floor(4 * points[i + 1]!) + 16 * Math.floor(4 * points[i + 2]!)]!++;
      const mean = n / 64;
      const square = cells.reduce((sum, c) => sum + ((c - mean) * (c - mean)) / mean, 0);
      // Mean 63 for random points; corner and face cells hold a few more, which is part of this number.
      expect(square).toBeLessThan(45);
    }
  });

  it('are the same for the same seed, others for another', () => {
    const run = (seed: string): Float64Array => take(createSites(kidney, randomStream(seed, 'sites')), 200, 0);
    expect(run('a')).toEqual(run('a'));
    expect(run('a')).not.toEqual(run('b'));
  });

  it('heed the least depth, which may change, and spread as well in what is left', () => {
    const sites = createSites(ball, randomStream('deep', 'sites'));
    const points = take(sites, 500, 0.002);
    for (let i = 0; i < points.length; i += 3)
      expect(Math.hypot(points[i]! - 5, points[i + 1]! - 5, points[i + 2]! - 5)).toBeLessThanOrEqual(
        0.001 * (1 + 1e-12),
      );
    const inner = (4 / 3) * Math.PI * 1e-9;
    expect(leastDistance(points, 500) / Math.cbrt(inner / 500)).toBeGreaterThan(0.64);
    const more = take(sites, 500, 0);
    expect(sites.count).toBe(1000);
    // What was too shallow before is empty and fills first: 26 parts in 27 of the ball.
    const late = [...more.subarray(1500)].filter((_, i) => i % 3 === 0).length;
    expect(late).toBe(500);
    let outer = 0;
    for (let i = 1500; i < 3000; i += 3) if (ball.depth(more[i]!, more[i + 1]!, more[i + 2]!) < 0.002) outer++;
    expect(outer).toBeGreaterThan(480);
  });

  it('end where no place is deep enough', () => {
    const sites = createSites(ball, randomStream('none', 'sites'));
    expect(sites.next(0.0031)).toBe(false);
    expect(sites.count).toBe(0);
    expect(sites.next(0.0015)).toBe(true);
  });
});

describe('sites at a least spacing', () => {
  it.each([
    ['box', box, 0.09, 0.02],
    ['wall', wall, 0.12, 0.01],
    ['bean', kidney, 0.00008, 0.00003],
  ] as const)('%s: apart, deep enough, and hardly room for one more', (_, tissue, spacing, minDepth) => {
    const points = spacedSites(tissue, randomStream('seed', 'sites'), spacing, minDepth);
    const n = points.length / 3;
    expect(leastDistance(points, n)).toBeGreaterThanOrEqual(spacing);
    for (let i = 0; i < points.length; i += 3)
      if (!(tissue.depth(points[i]!, points[i + 1]!, points[i + 2]!) >= minDepth)) expect.unreachable();
    const random = randomStream('room', 'sites');
    let tries = 0;
    let free = 0;
    while (tries < 4000) {
      const p = boxPoint(tissue, random) as Triple;
      if (!tissue.deeperThan(...p, minDepth)) continue;
      tries++;
      let crowded = false;
      for (let j = 0; j < points.length && !crowded; j += 3)
        crowded = Math.hypot(points[j]! - p[0], points[j + 1]! - p[1], points[j + 2]! - p[2]) < spacing;
      if (!crowded) free++;
    }
    expect(free / tries).toBeLessThan(0.01);
    // Randomly thrown balls of this diameter fill 0.38 of space: 0.38·6/π = 0.73 sites a cube of the spacing.
    expect(n / expectedSites(tissue.volume, spacing)).toBeGreaterThan(0.7);
    expect(n / expectedSites(tissue.volume, spacing)).toBeLessThan(1.6);
  });

  it('come in progressive order', () => {
    const points = spacedSites(box, randomStream('seed', 'sites'), 0.09, 0);
    for (const share of [0.1, 0.3, 0.6]) {
      const n = Math.floor((share * points.length) / 3);
      expect(leastDistance(points, n) / Math.cbrt(box.volume / n)).toBeGreaterThan(0.6);
    }
  });

  it('are one, or none, where no more fit', () => {
    expect(spacedSites(ball, randomStream('one', 'sites'), 0.1, 0)).toHaveLength(3);
    expect(spacedSites(ball, randomStream('one', 'sites'), 0.1, 0.01)).toHaveLength(0);
  });
});
