import { describe, expect, it } from 'vitest';
import { randomStream } from '../../../src/core/random.ts';
import type { Shape, Triple } from '../../../src/spec/types.ts';
import { boxPoint, contains, tissueOf } from '../../support/tissue-twins.ts';

describe('depth of a box', () => {
  const tissue = tissueOf({ shape: 'box', min: [-1, 0, 2], max: [3, 6, 4] });
  it.each([
    ['centre', [1, 3, 3], 1],
    ['near a face', [2.75, 3, 3], 0.25],
    ['on a face', [3, 3, 3], 0],
    ['off a face', [5, 3, 3], -2],
    ['off an edge', [6, 10, 3], -Math.hypot(3, 4)],
    ['off a corner', [5, 9, 10], -Math.hypot(2, 3, 6)],
  ] as const)('%s', (_, [x, y, z], depth) => {
    expect(tissue.depth(x, y, z)).toBeCloseTo(depth, 15);
  });
  it('has the volume of its edges', () => {
    expect(tissue.volume).toBe(4 * 6 * 2);
    expect(tissue.volumeError).toBe(0);
    expect(tissue.convex).toBe(true);
  });
});

describe('depth of a sphere', () => {
  const tissue = tissueOf({ shape: 'sphere', center: [1, 2, 3], radius: 2 });
  it('falls with the distance to the centre', () => {
    expect(tissue.depth(1, 2, 3)).toBe(2);
    expect(tissue.depth(1, 2, 3.5)).toBe(1.5);
    expect(tissue.depth(4, 6, 3)).toBe(2 - 5);
    expect(tissue.volume).toBeCloseTo((4 / 3) * Math.PI * 8, 12);
  });
});

describe('depth of a cylinder', () => {
  // Axis along (2, 1, 2)/3, length 6.
  const tissue = tissueOf({ shape: 'cylinder', from: [-2, -1, -2], to: [2, 1, 2], radius: 1.5 });
  const axis: Triple = [2 / 3, 1 / 3, 2 / 3];
  const side: Triple = [-1 / Math.SQRT2, 0, 1 / Math.SQRT2];
  const at = (along: number, across: number): Triple =>
    [0, 1, 2].map((i) => along * axis[i]! + across * side[i]!) as unknown as Triple;
  it.each([
    ['centre', 0, 0, 1.5],
    ['near an end', 2.75, 0.5, 0.25],
    ['near the side', 0.5, 1.25, 0.25],
    ['beyond an end', 5, 1, -2],
    ['beside', 1, 4.5, -3],
    ['off the rim', 6, 5.5, -Math.hypot(3, 4)],
  ] as const)('%s', (_, along, across, depth) => {
    expect(tissue.depth(...at(along, across))).toBeCloseTo(depth, 14);
  });
  it('fits its box: a point of the rim touches each side of it', () => {
    expect(tissue.volume).toBeCloseTo(Math.PI * 1.5 * 1.5 * 6, 12);
    for (const i of [0, 1, 2]) {
      const reach = 3 * axis[i]! + 1.5 * Math.sqrt(1 - axis[i]! * axis[i]!);
      expect(tissue.max[i]).toBeCloseTo(reach, 14);
      expect(tissue.min[i]).toBeCloseTo(-reach, 14);
    }
  });
});

describe('depth of an ellipsoid', () => {
  const random = randomStream('twins', 'ellipsoid');
  const sizes: readonly Triple[] = [
    [1, 1, 1],
    [3, 2, 1],
    [1, 3, 2],
    [0.004, 0.006, 0.003],
    [2, 2, 1],
    [1, 2, 2],
    [100, 1, 0.1],
  ];

  it.each(sizes)('of radii %d %d %d: a foot moved along its normal is as deep as it was moved', (...radii) => {
    const tissue = tissueOf({ shape: 'ellipsoid', center: [5, 6, 7], radii });
    const [least, most] = [Math.min(...radii), Math.max(...radii)];
    // Inside, the foot stays the nearest point as far as the least radius of curvature, least²/most.
    const reach = (0.99 * least * least) / most;
    let worst = 0;
    for (let i = 0; i < 3000; i++) {
      const u = 2 * random.next() - 1;
      const w = 2 * Math.PI * random.next();
      const d = [Math.sqrt(1 - u * u) * Math.cos(w), Math.sqrt(1 - u * u) * Math.sin(w), u];
      const n = d.map((v, k) => v / radii[k]!);
      const length = Math.hypot(...n);
      const shift = i % 3 === 0 ? 0 : i % 3 === 1 ? reach * random.next() : -3 * most * random.next();
      const [x, y, z] = d.map((v, k) => [5, 6, 7][k]! + v * radii[k]! - (shift * n[k]!) / length) as [
        number,
        number,
        number,
      ];
      worst = Math.max(worst, Math.abs(tissue.depth(x, y, z) - shift));
    }
    // The coordinates carry a rounding of 1e-16 times the largest of them, the normal as much.
    expect(worst).toBeLessThan(4e-15 * (10 + 4 * most));
  });

  it('at the centre and on the axes, where the closest-point equation has no root', () => {
    const tissue = tissueOf({ shape: 'ellipsoid', center: [0, 0, 0], radii: [3, 1, 2] });
    expect(tissue.depth(0, 0, 0)).toBe(1);
    expect(tissue.depth(0, 0.25, 0)).toBeCloseTo(0.75, 15);
    // On the long axis the foot leaves the axis nearer than 3 − 1²/3: foot x₀ = 9·x/(9 − 1), distance² = (x₀ − x)² + 1 − (x₀/3)².
    const foot = (9 * 1) / (9 - 1);
    expect(tissue.depth(1, 0, 0)).toBeCloseTo(Math.hypot(foot - 1, Math.sqrt(1 - (foot * foot) / 9)), 15);
    expect(tissue.depth(1, 1e-120, 0)).toBeCloseTo(tissue.depth(1, 0, 0), 15);
    expect(tissue.depth(1, 1e-12, 1e-13)).toBeCloseTo(tissue.depth(1, 0, 0), 11);
    expect(tissue.depth(2.9, 0, 0)).toBeCloseTo(0.1, 14);
    expect(tissue.depth(0, -4, 0)).toBe(-3);
  });

  it('is never deeper than a boundary sample and at most its spacing less', () => {
    const radii: Triple = [3, 1, 2];
    const tissue = tissueOf({ shape: 'ellipsoid', center: [0, 0, 0], radii });
    const samples: Triple[] = [];
    for (let i = 0; i < 120; i++)
      for (let j = 0; j < 240; j++) {
        const [u, w] = [(Math.PI * (i + 0.5)) / 120, (Math.PI * j) / 120];
        samples.push([3 * Math.sin(u) * Math.cos(w), Math.sin(u) * Math.sin(w), 2 * Math.cos(u)]);
      }
    for (let i = 0; i < 60; i++) {
      const [x, y, z] = boxPoint(tissue, random, 1.2);
      const near = Math.min(...samples.map(([a, b, c]) => Math.hypot(a - x, b - y, c - z)));
      const size = Math.abs(tissue.depth(x, y, z));
      expect(size).toBeLessThanOrEqual(near + 1e-14);
      expect(size).toBeGreaterThan(near - (3 * Math.PI) / 120);
    }
  });

  it.each(sizes)('of radii %d %d %d: deeperThan agrees with depth, also at the depth itself', (...radii) => {
    const tissue = tissueOf({ shape: 'ellipsoid', center: [0, 0, 0], radii });
    let wrong = 0;
    for (let i = 0; i < 3000; i++) {
      const [x, y, z] = boxPoint(tissue, random, 1.3);
      const d = tissue.depth(x, y, z);
      if (!tissue.deeperThan(x, y, z, d)) wrong++;
      if (tissue.deeperThan(x, y, z, d + 1e-13 * Math.max(...radii))) wrong++;
      const need = d * (1 + 2 * (random.next() - 0.5));
      if (tissue.deeperThan(x, y, z, need) !== d >= need) wrong++;
    }
    expect(wrong).toBe(0);
  });
});

describe('sign of every primitive', () => {
  const shapes: readonly Shape[] = [
    { shape: 'box', min: [-1, -2, 0], max: [1, 0, 3] },
    { shape: 'sphere', center: [1, 0, 0], radius: 0.7 },
    { shape: 'ellipsoid', center: [0, 1, 0], radii: [0.3, 2, 1] },
    { shape: 'cylinder', from: [0, 0, 1], to: [1, -1, 3], radius: 0.4 },
  ];
  it.each(shapes)('$shape: positive exactly where its definition holds; NaN is nowhere', (shape) => {
    const tissue = tissueOf(shape);
    const random = randomStream('sign', shape.shape);
    let inside = 0;
    let wrong = 0;
    for (let i = 0; i < 5000; i++) {
      const p = boxPoint(tissue, random, 1.2);
      if (tissue.depth(...p) >= 0 !== contains(shape, p)) wrong++;
      if (contains(shape, p)) inside++;
    }
    expect(wrong).toBe(0);
    expect(inside).toBeGreaterThan(300);
    expect(tissue.deeperThan(Number.NaN, 0, 0, 0)).toBe(false);
  });
});
