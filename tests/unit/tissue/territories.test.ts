import { describe, expect, it } from 'vitest';
import { randomStream } from '../../../src/core/random.ts';
import type { DemandPart, Shape } from '../../../src/spec/types.ts';
import { buildTissue } from '../../../src/tissue/build-tissue.ts';
import { createSites } from '../../../src/tissue/sites.ts';
import { LEAST_TERRITORY, measureTerritories } from '../../../src/tissue/territories.ts';
import type { Tissue } from '../../../src/tissue/tissue.ts';

const BOX: Shape = { shape: 'box', min: [0, 0, 0], max: [3, 1, 1] };
const tissueOf = (shape: Shape, demand: readonly DemandPart[] = []) => buildTissue(shape, new Map(), [], demand);

/** The slow twin: a lattice over the box, all points tried. */
function plainTerritories(tissue: Tissue, points: Float64Array, across: number): Float64Array {
  const out = new Float64Array(points.length / 3);
  const edge = [0, 1, 2].map((k) => (tissue.max[k as 0] - tissue.min[k as 0]) / across) as [number, number, number];
  for (let i = 0; i < across; i++)
    for (let j = 0; j < across; j++)
      for (let k = 0; k < across; k++) {
        const p = [i, j, k].map((c, a) => tissue.min[a as 0] + (c + 0.5) * edge[a]!) as [number, number, number];
        if (tissue.depth(...p) < 0) continue;
        let best = Number.POSITIVE_INFINITY;
        let nearest = 0;
        for (let n = 0; n < out.length; n++) {
          const away = Math.hypot(p[0] - points[3 * n]!, p[1] - points[3 * n + 1]!, p[2] - points[3 * n + 2]!);
          if (away < best) {
            best = away;
            nearest = n;
          }
        }
        out[nearest]! += tissue.perfusion.at(...p) * edge[0] * edge[1] * edge[2];
      }
  return out;
}

function sitesIn(tissue: Tissue, n: number, seed = 'seed'): Float64Array {
  const sites = createSites(tissue, randomStream(seed, 'sites'));
  for (let i = 0; i < n; i++) sites.next(0);
  return sites.positions();
}

describe('territories', () => {
  it('of two points in a box end at the plane half-way', () => {
    // The plane x = 1.1; the cut falls between boxes, so that only samples at it can be off.
    const [a, b] = measureTerritories(tissueOf(BOX), Float64Array.of(0.5, 0.5, 0.5, 1.7, 0.5, 0.5));
    expect(a).toBeCloseTo(1.1, 2);
    expect(a! + b!).toBeCloseTo(3, 12);
  });

  it('count volume times demand', () => {
    const demand = [{ shape: { shape: 'box', min: [0, 0, 0], max: [0.75, 1, 1] }, weight: 5 } as const];
    const [a, b] = measureTerritories(tissueOf(BOX, demand), Float64Array.of(1, 0.5, 0.5, 2, 0.5, 0.5));
    expect(a).toBeCloseTo(5 * 0.75 + 0.75, 9);
    expect(b).toBeCloseTo(1.5, 9);
  });

  it('of one point are the whole demand', () => {
    const ball: Shape = { shape: 'sphere', center: [0, 0, 0], radius: 1 };
    const [all] = measureTerritories(tissueOf(ball), Float64Array.of(0.3, 0, 0));
    expect(all! / ((4 / 3) * Math.PI)).toBeCloseTo(1, 3);
  });

  const parts: readonly DemandPart[] = [
    { shape: { shape: 'sphere', center: [1, 0.5, 0.5], radius: 0.4 }, weight: 6 },
    { shape: { shape: 'sphere', center: [2, 0.5, 0.5], radius: 0.3 }, weight: 0 },
  ];
  const hollow: Shape = {
    shape: 'difference',
    of: BOX,
    minus: [{ shape: 'cylinder', from: [1.5, 0.5, -1], to: [1.5, 0.5, 2], radius: 0.2 }],
  };
  it.each([
    ['box', tissueOf(BOX), 40],
    ['box with demand', tissueOf(BOX, parts), 40],
    ['box with a hole and demand', tissueOf(hollow, parts), 40],
  ] as const)('%s: agree with a plain lattice', (_, tissue, n) => {
    const points = sitesIn(tissue, n);
    const got = measureTerritories(tissue, points);
    const want = plainTerritories(tissue, points, 80);
    const mean = tissue.perfusion.whole / n;
    for (let i = 0; i < n; i++) expect(Math.abs(got[i]! - want[i]!) / mean).toBeLessThan(0.05);
    const sum = got.reduce((a, b) => a + b, 0);
    expect(sum / tissue.perfusion.whole).toBeCloseTo(1, 2);
  });

  it('are no less than a 64th of the mean', () => {
    // The third point stands where nothing is demanded, behind another.
    const tissue = tissueOf(BOX, [{ shape: { shape: 'box', min: [1.4, -1, -1], max: [4, 2, 2] }, weight: 0 }]);
    const got = measureTerritories(tissue, Float64Array.of(0.5, 0.5, 0.5, 1.2, 0.5, 0.5, 2.5, 0.5, 0.5));
    expect(LEAST_TERRITORY).toBe(1 / 64);
    expect(got[2]).toBeCloseTo(1.4 / 3 / 64, 6);
    expect(got[0]).toBeCloseTo(0.85, 2);
  });

  it('do not depend on the order of points, and are the same each time', () => {
    const tissue = tissueOf(hollow, parts);
    const points = sitesIn(tissue, 60);
    const got = measureTerritories(tissue, points);
    expect(measureTerritories(tissue, points)).toEqual(got);
    const backwards = new Float64Array(points.length);
    for (let i = 0; i < 60; i++) backwards.set(points.subarray(3 * i, 3 * i + 3), 3 * (59 - i));
    const turned = measureTerritories(tissue, backwards).reverse();
    for (let i = 0; i < 60; i++) expect(turned[i]! / got[i]!).toBeCloseTo(1, 9);
  });
});
