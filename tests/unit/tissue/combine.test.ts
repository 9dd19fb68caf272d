import { describe, expect, it } from 'vitest';
import { InputError } from '../../../src/core/errors.ts';
import { randomStream } from '../../../src/core/random.ts';
import type { Shape } from '../../../src/spec/types.ts';
import { buildTissue } from '../../../src/tissue/build-tissue.ts';
import { ball, insideOut } from '../../support/surfaces.ts';
import { boxPoint, contains, tissueOf } from '../../support/tissue-twins.ts';

const a: Shape = { shape: 'box', min: [0, 0, 0], max: [2, 1, 1] };
const b: Shape = { shape: 'sphere', center: [2, 0.5, 0.5], radius: 0.75 };
const c: Shape = { shape: 'cylinder', from: [1, 0.5, -1], to: [1, 0.5, 2], radius: 0.25 };
const union: Shape = { shape: 'union', parts: [a, b] };
const common: Shape = { shape: 'intersection', parts: [a, b] };
const rest: Shape = { shape: 'difference', of: a, minus: [b, c] };

describe('combined shapes', () => {
  it.each([
    ['union', union],
    ['intersection', common],
    ['difference', rest],
    ['all three', { shape: 'difference', of: { shape: 'union', parts: [common, c] }, minus: [rest] } as const],
  ] as const)('%s: inside by definition, and no sample of the outside nearer than the depth', (_, shape) => {
    const tissue = tissueOf(shape);
    const random = randomStream('csg', 'points');
    const outside = Array.from({ length: 20_000 }, () => boxPoint(tissue, random, 1.3)).filter(
      (p) => !contains(shape, p),
    );
    for (let i = 0; i < 400; i++) {
      const p = boxPoint(tissue, random, 1.1);
      const d = tissue.depth(...p);
      expect(d >= 0).toBe(contains(shape, p));
      if (d <= 0) continue;
      const near = Math.min(...outside.map((q) => Math.hypot(q[0] - p[0], q[1] - p[1], q[2] - p[2])));
      expect(d).toBeLessThanOrEqual(near);
    }
  });

  it('intersection and difference of exact parts are exact inside', () => {
    const tissue = tissueOf(rest);
    // 0.25 from the cylinder's side, farther from all else.
    expect(tissue.depth(0.5, 0.5, 0.5)).toBeCloseTo(0.25, 15);
    // The sphere of the difference is nearest.
    expect(tissue.depth(1.26 - 0.005, 0.5, 0.02)).toBeCloseTo(0.005, 12);
    expect(tissueOf(common).depth(1.35, 0.5, 0.5)).toBeCloseTo(0.75 - 0.65, 15);
  });

  it('questions agree with depth for every combination', () => {
    const random = randomStream('csg', 'questions');
    for (const shape of [union, common, rest]) {
      const tissue = tissueOf(shape);
      for (let i = 0; i < 2000; i++) {
        const p = boxPoint(tissue, random, 1.2);
        const d = tissue.depth(...p);
        expect(tissue.deeperThan(...p, d)).toBe(true);
        const need = 0.5 * (random.next() - 0.3);
        expect(tissue.deeperThan(...p, need)).toBe(d >= need);
      }
    }
  });

  it('obeys the identities of sets', () => {
    const random = randomStream('csg', 'sets');
    const same = tissueOf({ shape: 'union', parts: [a, a] });
    const again = tissueOf({ shape: 'intersection', parts: [a, a] });
    const back = tissueOf({ shape: 'union', parts: [common, { shape: 'difference', of: a, minus: [b] }] });
    const plain = tissueOf(a);
    for (let i = 0; i < 1000; i++) {
      const p = boxPoint(plain, random, 1.2);
      expect(same.depth(...p)).toBe(plain.depth(...p));
      expect(again.depth(...p)).toBe(plain.depth(...p));
      expect(back.depth(...p) >= 0).toBe(plain.depth(...p) >= 0);
    }
  });

  it('knows convexity only where it is sure', () => {
    expect(tissueOf(common).convex).toBe(true);
    expect(tissueOf(union).convex).toBe(false);
    expect(tissueOf(rest).convex).toBe(false);
  });

  it('integrates volumes within four of its stated standard errors', () => {
    // Box less a cylinder through it, less the half ball at its end (radius 0.75 > 0.5, so cut by the box: leave it out).
    const holed = tissueOf({ shape: 'difference', of: a, minus: [c] });
    const twoBalls = tissueOf({
      shape: 'union',
      parts: [b, { shape: 'sphere', center: [2.75, 0.5, 0.5], radius: 0.75 }],
    });
    const shell = tissueOf({
      shape: 'difference',
      of: b,
      minus: [{ shape: 'sphere', center: [2, 0.5, 0.5], radius: 0.7 }],
    });
    // Two caps of height r/2 are common to balls a radius apart: π h² (3r − h)/3 each.
    const cap = (Math.PI * 0.375 * 0.375 * (3 * 0.75 - 0.375)) / 3;
    const sphere = (r: number): number => (4 / 3) * Math.PI * r * r * r;
    for (const [tissue, exact] of [
      [holed, 2 - Math.PI * 0.25 * 0.25],
      [twoBalls, 2 * sphere(0.75) - 2 * cap],
      [shell, sphere(0.75) - sphere(0.7)],
    ] as const) {
      expect(tissue.volumeError).toBeGreaterThan(0);
      expect(tissue.volumeError).toBeLessThan(0.004);
      expect(Math.abs(tissue.volume / exact - 1)).toBeLessThan(4 * tissue.volumeError);
    }
    expect(tissueOf({ shape: 'difference', of: a, minus: [c] }).volume).toBe(holed.volume);
  });

  it('keeps out of forbidden parts', () => {
    const tissue = buildTissue(a, new Map(), [c]);
    expect(tissue.depth(1, 0.5, 0.5)).toBeCloseTo(-0.25, 15);
    expect(tissue.deeperThan(1, 0.5, 0.5, 0)).toBe(false);
    expect(tissue.min).toEqual([0, 0, 0]);
  });
});

describe('shapes that make no tissue', () => {
  const faults = (shape: Shape, surfaces = new Map()): string => {
    try {
      buildTissue(shape, surfaces);
    } catch (error) {
      if (error instanceof InputError) return error.message;
      throw error;
    }
    return 'accepted';
  };
  it('are refused with their place', () => {
    expect(faults({ shape: 'difference', of: a, minus: [a] })).toMatch(/^tissue: got a tissue with no volume/);
    expect(faults({ shape: 'intersection', parts: [a, { shape: 'sphere', center: [9, 9, 9], radius: 1 }] })).toMatch(
      /no volume/,
    );
    expect(faults({ shape: 'union', parts: [a, { shape: 'sphere', center: [0, 0, 0], radius: -1 }] })).toMatch(
      /^tissue\.parts\[1\]\.radius: got a radius of -1 m, expected > 0$/,
    );
    expect(faults({ shape: 'box', min: [0, 0, 0], max: [1, Number.NaN, 0] })).toMatch(/max\[1\].*\n.*max\[2\]/);
    expect(faults({ shape: 'cylinder', from: [1, 1, 1], to: [1, 1, 1], radius: 1 })).toMatch(
      /tissue\.to: got a length of 0/,
    );
    expect(faults({ shape: 'union', parts: [] })).toMatch(/tissue\.parts: got none/);
    expect(faults({ shape: 'surface', file: 'no.stl', unit: 'mm' })).toMatch(
      /tissue\.file: got no\.stl, which was not read/,
    );
  });
  it('all at once, surfaces too', () => {
    const shape: Shape = {
      shape: 'union',
      parts: [
        { shape: 'surface', file: 'in.stl', unit: 'mm' },
        { shape: 'sphere', center: [0, 0, 0], radius: 0 },
        { shape: 'surface', file: 'in.stl', unit: 'mm' },
      ],
    };
    const message = faults(shape, new Map([['in.stl', insideOut(ball(1))]]));
    expect(message.split('\n')).toHaveLength(2);
    expect(message).toMatch(/^in\.stl: got a surface that is inside out/);
    expect(message).toMatch(/tissue\.parts\[1\]\.radius/);
  });
});
