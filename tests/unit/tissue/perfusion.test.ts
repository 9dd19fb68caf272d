import { describe, expect, it } from 'vitest';
import { InputError } from '../../../src/core/errors.ts';
import { randomStream } from '../../../src/core/random.ts';
import type { DemandPart, Shape } from '../../../src/spec/types.ts';
import { buildTissue } from '../../../src/tissue/build-tissue.ts';
import { createSites } from '../../../src/tissue/sites.ts';
import { spacedSites } from '../../../src/tissue/spaced-sites.ts';
import type { Tissue } from '../../../src/tissue/tissue.ts';
import { boxPoint, contains } from '../../support/tissue-twins.ts';

const BOX: Shape = { shape: 'box', min: [0, 0, 0], max: [2, 1, 1] };
const EVERYWHERE: Shape = { shape: 'box', min: [-9, -9, -9], max: [9, 9, 9] };
const BALL: Shape = { shape: 'sphere', center: [0.5, 0.5, 0.5], radius: 0.3 };
const CORE: Shape = { shape: 'sphere', center: [0.5, 0.5, 0.5], radius: 0.15 };
const BALL_VOLUME = (4 / 3) * Math.PI * 0.3 * 0.3 * 0.3;
const CORE_VOLUME = BALL_VOLUME / 8;

const demanding = (demand: readonly DemandPart[], shape: Shape = BOX): Tissue =>
  buildTissue(shape, new Map(), [], demand);

describe('demand of a point', () => {
  it('is 1 all over where none is given', () => {
    const { perfusion, volume } = demanding([]);
    expect(perfusion.uniform).toBe(true);
    expect(perfusion.at(0.5, 0.5, 0.5)).toBe(1);
    expect(perfusion.whole).toBe(volume);
  });

  it('is the weight of the last part that holds it, 1 where none does', () => {
    const { perfusion } = demanding([
      { shape: BALL, weight: 4 },
      { shape: CORE, weight: 0 },
    ]);
    expect(perfusion.at(0.5, 0.5, 0.5)).toBe(0);
    expect(perfusion.at(0.5, 0.5, 0.7)).toBe(4);
    expect(perfusion.at(1.5, 0.5, 0.5)).toBe(1);
    // Listed the other way round, the core is hidden.
    expect(
      demanding([
        { shape: CORE, weight: 0 },
        { shape: BALL, weight: 4 },
      ]).perfusion.at(0.5, 0.5, 0.5),
    ).toBe(4);
  });

  it('never leaves the bounds told for a ball', () => {
    const parts: DemandPart[] = [
      { shape: BALL, weight: 4 },
      { shape: { shape: 'difference', of: BALL, minus: [CORE] }, weight: 0.5 },
      { shape: { shape: 'union', parts: [CORE, { shape: 'box', min: [1, 0, 0], max: [1.3, 1, 1] }] }, weight: 0 },
    ];
    const tissue = demanding(parts);
    const random = randomStream('bounds', 'perfusion');
    const bounds = new Float64Array(2);
    let told = 0;
    for (let round = 0; round < 1500; round++) {
      const p = boxPoint(tissue, random);
      const radius = 0.3 * random.next();
      tissue.perfusion.within(...p, radius, bounds);
      if (bounds[0] === bounds[1]) told++;
      const q = boxPoint(tissue, random);
      const away = Math.hypot(...q.map((x, k) => x - p[k]!));
      const step = away > radius ? radius / away : 1;
      const near = p.map((x, k) => x + step * (q[k]! - x)) as [number, number, number];
      const demand = tissue.perfusion.at(...near);
      const wanted = parts.findLast((part) => contains(part.shape, near))?.weight ?? 1;
      expect(demand).toBe(wanted);
      expect(demand).toBeGreaterThanOrEqual(bounds[0]!);
      expect(demand).toBeLessThanOrEqual(bounds[1]!);
    }
    // Bounds that always say "0 to 4" would be no help.
    expect(told).toBeGreaterThan(500);
  });
});

describe('demand of a tissue', () => {
  it.each([
    ['a ball of 4', [{ shape: BALL, weight: 4 }], 2 - BALL_VOLUME + 4 * BALL_VOLUME],
    [
      'a hollow ball alone',
      [
        { shape: EVERYWHERE, weight: 0 },
        { shape: BALL, weight: 3 },
        { shape: CORE, weight: 0 },
      ],
      3 * (BALL_VOLUME - CORE_VOLUME),
    ],
    ['a ball that sticks out', [{ shape: { ...BALL, center: [0, 0.5, 0.5] }, weight: 9 }], 2 + 8 * 0.5 * BALL_VOLUME],
  ] as [string, DemandPart[], number][])('%s: is the integral of its weights', (_, demand, whole) => {
    const { perfusion } = demanding(demand);
    expect(Math.abs(perfusion.whole / whole - 1)).toBeLessThan(5 * perfusion.error + 1e-12);
    expect(perfusion.error).toBeLessThan(1e-3);
  });

  it('leaves out what is no tissue', () => {
    const hollow: Shape = { shape: 'difference', of: BOX, minus: [CORE] };
    const { perfusion, volume } = demanding([{ shape: BALL, weight: 2 }], hollow);
    expect(perfusion.whole / (volume + BALL_VOLUME - CORE_VOLUME)).toBeCloseTo(1, 3);
  });

  it('finds a part far smaller than the tissue', () => {
    const speck: Shape = { shape: 'sphere', center: [0.5123, 0.5321, 0.5], radius: 1e-3 };
    const { perfusion } = demanding([
      { shape: EVERYWHERE, weight: 0 },
      { shape: speck, weight: 7 },
    ]);
    const whole = 7 * (4 / 3) * Math.PI * 1e-9;
    expect(perfusion.whole / whole).toBeCloseTo(1, 1);
    expect(Math.abs(perfusion.whole / whole - 1)).toBeLessThan(5 * perfusion.error);
  });

  it('is refused where it is nothing', () => {
    expect(() => demanding([{ shape: EVERYWHERE, weight: 0 }])).toThrow(InputError);
    expect(() => demanding([{ shape: EVERYWHERE, weight: 0 }])).toThrow(/tissue\.demand.*weights of 0/);
  });

  it('names a part whose surface was not read', () => {
    const lost: Shape = { shape: 'surface', file: 'a.stl', unit: 'mm' };
    expect(() => demanding([{ shape: lost, weight: 2 }])).toThrow(/tissue\.demand\[0\]\.file/);
  });
});

/** Sites within a ball, of the first so many. */
function countIn(points: Float64Array, n: number, radius: number): number {
  let count = 0;
  for (let i = 0; i < 3 * n; i += 3) {
    if (Math.hypot(points[i]! - 0.5, points[i + 1]! - 0.5, points[i + 2]! - 0.5) <= radius) count++;
  }
  return count;
}

function leastApart(points: Float64Array, keep: (i: number) => boolean): number {
  const kept: number[] = [];
  for (let i = 0; i < points.length; i += 3) if (keep(i)) kept.push(i);
  let least = Number.POSITIVE_INFINITY;
  for (const i of kept)
    for (const j of kept) {
      if (j >= i) break;
      const [dx, dy, dz] = [0, 1, 2].map((k) => points[i + k]! - points[j + k]!) as [number, number, number];
      least = Math.min(least, dx * dx + dy * dy + dz * dz);
    }
  return Math.sqrt(least);
}

describe('progressive sites over a demand', () => {
  it.each([0.1, 0.5, 3, 20, 200])('of weight %d in a ball: as many there as its volume times its weight', (weight) => {
    const tissue = demanding([{ shape: BALL, weight }]);
    const sites = createSites(tissue, randomStream('seed', 'sites'));
    for (let i = 0; i < 2048; i++) sites.next(0);
    expect(sites.count).toBe(2048);
    const points = sites.positions();
    const share = (weight * BALL_VOLUME) / (2 - BALL_VOLUME + weight * BALL_VOLUME);
    // Sites crowd a little at borders, of the tissue and between parts: by a few, or a tenth where parts hold few.
    for (const n of [256, 1024, 2048]) {
      expect(Math.abs(countIn(points, n, 0.3) - share * n)).toBeLessThan(4 + 0.1 * share * n);
    }
    const whole = tissue.perfusion.whole / 2048;
    const inside = (i: number) => Math.hypot(points[i]! - 0.5, points[i + 1]! - 0.5, points[i + 2]! - 0.5) <= 0.3;
    // As apart, for their density, as where demand is 1 everywhere: 0.64 (volume/n)^(1/3).
    expect(leastApart(points, inside) / Math.cbrt(whole / weight)).toBeGreaterThan(0.64);
    expect(leastApart(points, (i) => !inside(i)) / Math.cbrt(whole)).toBeGreaterThan(0.64);
    // A site of either kind keeps the distance of the denser kind from one of the other.
    const dense = Math.max(1, weight);
    expect(leastApart(points, () => true) / Math.cbrt(whole / dense)).toBeGreaterThan(0.64);
  });

  it('leave parts of weight 0 empty', () => {
    const tissue = demanding([
      { shape: BALL, weight: 5 },
      { shape: CORE, weight: 0 },
    ]);
    const sites = createSites(tissue, randomStream('seed', 'sites'));
    for (let i = 0; i < 2000; i++) sites.next(0);
    expect(countIn(sites.positions(), 2000, 0.15)).toBe(0);
    expect(countIn(sites.positions(), 2000, 0.3)).toBeGreaterThan(200);
  });

  it('are the same for the same seed, others for another', () => {
    const run = (seed: string): Float64Array => {
      const sites = createSites(demanding([{ shape: BALL, weight: 5 }]), randomStream(seed, 'sites'));
      for (let i = 0; i < 300; i++) sites.next(0);
      return sites.positions();
    };
    expect(run('a')).toEqual(run('a'));
    expect(run('a')).not.toEqual(run('b'));
  });

  it('are those of no demand where every part weighs 1 as the rest does, but for the draws', () => {
    const sites = createSites(demanding([{ shape: BALL, weight: 1 }]), randomStream('one', 'sites'));
    for (let i = 0; i < 2048; i++) sites.next(0);
    const even = createSites(demanding([]), randomStream('one', 'sites'));
    for (let i = 0; i < 2048; i++) even.next(0);
    const [one, other] = [sites, even].map((stream) => countIn(stream.positions(), 2048, 0.3));
    expect(Math.abs(one! - other!)).toBeLessThan(0.1 * other!);
  });
});

describe('sites at a least spacing over a demand', () => {
  it.each([0.2, 4])('of weight %d: the spacing goes with weight^(−1/3), and hardly one more has room', (weight) => {
    const tissue = demanding([{ shape: { shape: 'box', min: [0, 0, 0], max: [1, 1, 1] }, weight }]);
    const spacing = 0.1;
    const points = spacedSites(tissue, randomStream('seed', 'sites'), spacing, 0);
    const near = spacing / Math.cbrt(weight);
    const left = (i: number) => points[i]! <= 1;
    expect(leastApart(points, left)).toBeGreaterThanOrEqual(near);
    expect(leastApart(points, (i) => !left(i))).toBeGreaterThanOrEqual(spacing);
    let count = 0;
    for (let i = 0; i < points.length; i += 3) if (left(i)) count++;
    // More fit at the faces of the tissue, the more the wider the spacing.
    expect(count / (points.length / 3 - count) / weight).toBeGreaterThan(0.8);
    expect(count / (points.length / 3 - count) / weight).toBeLessThan(1.25);
    const random = randomStream('room', 'sites');
    let free = 0;
    for (let tries = 0; tries < 2000; tries++) {
      const p = boxPoint(tissue, random);
      const own = p[0] <= 1 ? near : spacing;
      let crowded = false;
      for (let j = 0; j < points.length && !crowded; j += 3) {
        const least = Math.min(own, points[j]! <= 1 ? near : spacing);
        crowded = Math.hypot(points[j]! - p[0], points[j + 1]! - p[1], points[j + 2]! - p[2]) < least;
      }
      if (!crowded) free++;
    }
    expect(free / 2000).toBeLessThan(0.02);
  });
});
