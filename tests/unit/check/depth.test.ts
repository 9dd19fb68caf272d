import { describe, expect, test } from 'vitest';
import { measureShape } from '../../../src/check/depth.ts';
import { measureSurface, squaredPointTriangle } from '../../../src/check/surface-depth.ts';
import { randomStream } from '../../../src/core/random.ts';
import type { TriangleSurface } from '../../../src/core/surface.ts';
import type { Shape } from '../../../src/spec/types.ts';

const NONE = new Map();

describe('single shapes', () => {
  // Distances written down by hand from elementary geometry.
  const cases: [string, Shape, [number, number, number], number][] = [
    ['box, inside', { shape: 'box', min: [0, 0, 0], max: [4, 6, 8] }, [1, 2, 3], 1],
    ['box, on a face', { shape: 'box', min: [0, 0, 0], max: [4, 6, 8] }, [0, 2, 3], 0],
    ['box, off a corner', { shape: 'box', min: [0, 0, 0], max: [4, 6, 8] }, [-3, 10, 8], -5],
    ['sphere', { shape: 'sphere', center: [1, 2, 3], radius: 5 }, [1, 5, 7], 0],
    ['sphere, outside', { shape: 'sphere', center: [1, 2, 3], radius: 5 }, [1, 2, 13], -5],
    ['cylinder, near the side', { shape: 'cylinder', from: [0, 0, 0], to: [0, 0, 10], radius: 5 }, [3, 0, 5], 2],
    ['cylinder, near the end', { shape: 'cylinder', from: [0, 0, 0], to: [0, 0, 10], radius: 5 }, [0, 3, 9], 1],
    ['cylinder, off the rim', { shape: 'cylinder', from: [0, 0, 0], to: [0, 0, 10], radius: 5 }, [8, 0, 14], -5],
    ['ellipsoid, centre', { shape: 'ellipsoid', center: [1, 1, 1], radii: [3, 2, 4] }, [1, 1, 1], 2],
    ['ellipsoid, on the long axis', { shape: 'ellipsoid', center: [0, 0, 0], radii: [3, 2, 4] }, [0, 0, 6], -2],
    ['ellipsoid, as a sphere', { shape: 'ellipsoid', center: [0, 0, 0], radii: [5, 5, 5] }, [0, 3, 0], 2],
    // Nearest point leaves the axis: x = 2²·0/…, z = 7²·1/(7² − 2²), and 4(1 − z²/49) square to it.
    [
      'ellipsoid of revolution, on its long axis',
      { shape: 'ellipsoid', center: [0, 0, 0], radii: [2, 2, 7] },
      [0, 0, 1],
      Math.sqrt((49 / 45 - 1) * (49 / 45 - 1) + 4 * (1 - (49 / 45) * (49 / 45) * (1 / 49))),
    ],
  ];
  test.each(cases)('%s', (_, shape, [x, y, z], wanted) => {
    expect(measureShape(shape, NONE).depth(x, y, z)).toBeCloseTo(wanted, 12);
  });

  test('an ellipsoid gives a bound from below, good at its centre', () => {
    const random = randomStream('1', 'bound');
    for (const radii of [
      [3, 1.2, 0.7],
      [2, 2, 2],
      [0.5, 0.5, 9],
    ] as [number, number, number][]) {
      const { depth, depthAtLeast } = measureShape({ shape: 'ellipsoid', center: [1, 2, 3], radii }, NONE);
      expect(depthAtLeast!(1, 2, 3)).toBeCloseTo(Math.min(...radii), 12);
      for (let k = 0; k < 3000; k++) {
        // Some hard by the boundary, where rounding counts.
        const near = k % 3 === 0 ? 1 + 1e-15 * (random.next() - 0.5) : 1.2 * random.next();
        const [u, v] = [2 * random.next() - 1, 2 * Math.PI * random.next()];
        const w = Math.sqrt(1 - u * u);
        const [x, y, z] = [u, w * Math.cos(v), w * Math.sin(v)].map((n, i) => i + 1 + near * n * radii[i]!);
        expect(depthAtLeast!(x!, y!, z!)).toBeLessThanOrEqual(depth(x!, y!, z!));
      }
    }
  });

  // The nearest of many boundary points is never nearer than the true distance, and little farther.
  test('ellipsoid against a fine cloud of boundary points', () => {
    const [a, b, c] = [3, 1.2, 0.7];
    const { depth } = measureShape({ shape: 'ellipsoid', center: [0, 0, 0], radii: [a, b, c] }, NONE);
    const random = randomStream('1', 'ellipsoid');
    const points = [
      [0, 0, 0],
      [2, 0, 0],
      [2.9, 0, 0],
      [0, 1, 0],
      [1, 0.5, 0],
      [1, 0, 1e-9],
      ...Array.from({ length: 40 }, () => [a, b, c].map((e) => 1.6 * e * (2 * random.next() - 1))),
    ];
    for (const [x, y, z] of points as [number, number, number][]) {
      let nearest = Infinity;
      for (let i = 0; i <= 400; i++) {
        for (let k = 0; k < 800; k++) {
          const [u, v] = [(Math.PI * i) / 400, (2 * Math.PI * k) / 800];
          const px = a * Math.sin(u) * Math.cos(v) - x;
          const py = b * Math.sin(u) * Math.sin(v) - y;
          nearest = Math.min(nearest, Math.hypot(px, py, c * Math.cos(u) - z));
        }
      }
      const got = depth(x, y, z);
      expect(Math.abs(got)).toBeLessThanOrEqual(nearest + 1e-12);
      expect(Math.abs(got)).toBeGreaterThan(nearest - 0.02);
      expect(got > 0).toBe((x / a) * (x / a) + (y / b) * (y / b) + (z / c) * (z / c) < 1);
    }
  });
});

describe('compound shapes', () => {
  const ball = (x: number): Shape => ({ shape: 'sphere', center: [x, 0, 0], radius: 2 });
  test('a union holds what either holds', () => {
    const { depth, min, max } = measureShape({ shape: 'union', parts: [ball(0), ball(3)] }, NONE);
    expect([depth(-1, 0, 0), depth(4, 0, 0), depth(6, 0, 0)]).toEqual([1, 1, -1]);
    expect([min[0], max[0]]).toEqual([-2, 5]);
  });
  test('an intersection holds what both hold', () => {
    const { depth } = measureShape({ shape: 'intersection', parts: [ball(0), ball(3)] }, NONE);
    expect([depth(1.5, 0, 0), depth(0, 0, 0)]).toEqual([0.5, -1]);
  });
  test('a difference lacks what is taken', () => {
    const { depth } = measureShape({ shape: 'difference', of: ball(0), minus: [ball(3)] }, NONE);
    expect([depth(-1, 0, 0), depth(0.5, 0, 0), depth(1.5, 0, 0)]).toEqual([1, 0.5, -0.5]);
  });
});

describe('triangle surface', () => {
  const surface = bracket();
  const { depth } = measureSurface(surface);

  test('agrees with the union of boxes it is made of, in sign everywhere', () => {
    const random = randomStream('2', 'bracket');
    for (let k = 0; k < 4000; k++) {
      // Every fourth point on the grid of the corners, where rays pass through edges and corners.
      const snap = k % 4 === 0 ? 2 : 1e9;
      const at = () => Math.round((random.next() * 5 - 1) * snap) / snap;
      const [x, y, z] = [at(), at(), at()];
      const one = Math.min(x, 3 - x, y, 1 - y, z, 2 - z);
      const two = Math.min(x, 1 - x, y, 3 - y, z, 2 - z);
      const deepest = Math.max(one, two);
      if (Math.abs(deepest) < 1e-9) expect(Math.abs(depth(x, y, z))).toBeLessThan(1e-9);
      else expect(depth(x, y, z) > 0, `${x} ${y} ${z}`).toBe(deepest > 0);
    }
  });

  test('distance is that of the nearest triangle, all tried', () => {
    const random = randomStream('3', 'bracket');
    for (let k = 0; k < 500; k++) {
      const [x, y, z] = [0, 0, 0].map(() => random.next() * 5 - 1) as [number, number, number];
      let nearest = Infinity;
      for (let f = 0; f < surface.triangle.length; f += 3) {
        const [a, b, c] = surface.triangle.slice(f, f + 3) as unknown as [number, number, number];
        nearest = Math.min(nearest, squaredPointTriangle(surface.position, a, b, c, x, y, z));
      }
      expect(Math.abs(depth(x, y, z))).toBe(Math.sqrt(nearest));
    }
  });

  test('distances by hand', () => {
    expect(depth(0.5, 0.5, 1)).toBeCloseTo(0.5, 12);
    // Inside the elbow the nearest wall is the re-entrant edge at (1, 1).
    expect(depth(0.7, 0.6, 1)).toBeCloseTo(Math.hypot(0.3, 0.4), 12);
    expect(depth(4, 4, 3)).toBeCloseTo(-Math.hypot(1, 3, 1), 12);
  });
});

/** An L-shaped prism, 2 high: non-convex, with a re-entrant edge. */
function bracket(): TriangleSurface {
  const outline = [
    [0, 0],
    [3, 0],
    [3, 1],
    [1, 1],
    [1, 3],
    [0, 3],
  ];
  const n = outline.length;
  const position = Float64Array.from([0, 2].flatMap((z) => outline.flatMap(([x, y]) => [x!, y!, z])));
  const triangle: number[] = [];
  for (let k = 0; k < n; k++) {
    const next = (k + 1) % n;
    triangle.push(k, next, next + n, k, next + n, k + n);
  }
  for (const [a, b, c] of [
    [0, 1, 2],
    [0, 2, 3],
    [0, 3, 4],
    [0, 4, 5],
  ]) {
    triangle.push(a!, c!, b!, a! + n, b! + n, c! + n);
  }
  return { position, triangle: Int32Array.from(triangle) };
}
