import { describe, expect, it } from 'vitest';
import { randomStream } from '../../../src/core/random.ts';
import { squaredDistanceBetweenSegments, squaredDistanceToSegment } from '../../../src/core/segments.ts';
import { TubeGrid } from '../../../src/core/tube-grid.ts';

type Segment = [number, number, number, number, number, number];

/** Least distance of two segments by looking at many pairs of points: never less than the true one. */
function sampledDistance(s: Segment, t: Segment, steps: number): number {
  let best = Infinity;
  for (let i = 0; i <= steps; i++) {
    for (let j = 0; j <= steps; j++) {
      let sum = 0;
      for (let k = 0; k < 3; k++) {
        const d = s[k]! + (i / steps) * (s[k + 3]! - s[k]!) - t[k]! - (j / steps) * (t[k + 3]! - t[k]!);
        sum += d * d;
      }
      best = Math.min(best, sum);
    }
  }
  return Math.sqrt(best);
}

describe('segment distances', () => {
  it('agree with dense sampling, also for parallel, crossing and pointlike segments', () => {
    const random = randomStream('segments', 'test');
    for (let round = 0; round < 300; round++) {
      const draw = () => 2 * random.next() - 1;
      const s: Segment = [draw(), draw(), draw(), draw(), draw(), draw()];
      const t: Segment = [draw(), draw(), draw(), draw(), draw(), draw()];
      if (round % 5 === 1) for (let k = 0; k < 3; k++) t[k + 3] = t[k]! + 0.7 * (s[k + 3]! - s[k]!);
      if (round % 5 === 2) for (let k = 0; k < 3; k++) t[k + 3] = t[k]!;
      if (round % 5 === 3) for (let k = 0; k < 3; k++) s[k + 3] = s[k]!;
      const exact = Math.sqrt(squaredDistanceBetweenSegments(...s, ...t));
      const sampled = sampledDistance(s, t, 60);
      expect(exact).toBeLessThanOrEqual(sampled + 1e-12);
      expect(exact).toBeGreaterThan(sampled - 0.08);
      expect(squaredDistanceBetweenSegments(...t, ...s)).toBeCloseTo(exact * exact, 12);
    }
  });

  it('give known values', () => {
    expect(squaredDistanceToSegment(0, 3, 4, -1, 0, 0, 1, 0, 0)).toBe(3 * 3 + 4 * 4);
    expect(squaredDistanceToSegment(4, 4, 0, -1, 0, 0, 1, 0, 0)).toBe(3 * 3 + 4 * 4);
    expect(squaredDistanceBetweenSegments(0, 0, 0, 1, 0, 0, 0.5, -1, 2, 0.5, 1, 2)).toBe(2 * 2);
    expect(squaredDistanceBetweenSegments(0, 0, 0, 1, 0, 0, 3, 1, 0, 5, 1, 0)).toBe(2 * 2 + 1);
  });
});

describe('tube grid', () => {
  it('finds every tube that comes within reach, wherever it was listed', () => {
    const random = randomStream('grid', 'test');
    for (const cell of [0.05, 0.13, 0.4]) {
      const grid = new TubeGrid([0, 0, 0], [1, 1, 1], cell);
      const tubes: Segment[] = [];
      const radii: number[] = [];
      for (let i = 0; i < 150; i++) {
        // Some lie partly or wholly outside the box, some are fat, some pointlike.
        const draw = () => 1.4 * random.next() - 0.2;
        const a = [draw(), draw(), draw()] as const;
        const far = random.next() < 0.2 ? 0 : 0.6 * random.next();
        const b = a.map((x) => x + far * (2 * random.next() - 1)) as unknown as [number, number, number];
        tubes.push([...a, ...b]);
        radii.push(random.next() < 0.1 ? 0.2 : 0.02 * random.next());
        grid.add(i, ...a, ...b, radii[i]!);
      }
      let met = 0;
      for (let q = 0; q < 200; q++) {
        const draw = () => 1.2 * random.next() - 0.1;
        const query: Segment = [draw(), draw(), draw(), draw(), draw(), draw()];
        const reach = 0.1 * random.next();
        const count = grid.gather(...query, reach);
        const found = new Set(grid.found.subarray(0, count));
        expect(found.size).toBe(count);
        for (let i = 0; i < tubes.length; i++) {
          const distance = Math.sqrt(squaredDistanceBetweenSegments(...query, ...tubes[i]!));
          if (distance > reach + radii[i]!) continue;
          met++;
          expect(found.has(i), `cell ${cell}, query ${q}, tube ${i}`).toBe(true);
        }
      }
      expect(met).toBeGreaterThan(500);
    }
  });
});
