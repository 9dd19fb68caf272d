import { describe, expect, it } from 'vitest';
import { type Random, randomStream } from '../../../src/core/random.ts';
import { boxesApart, squaredDistanceBetweenSegments, squaredDistanceToSegment } from '../../../src/core/segments.ts';
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

  it('are never within a reach that their boxes are apart by', () => {
    const random = randomStream('boxes', 'test');
    let apart = 0;
    let near = 0;
    for (let round = 0; round < 3000; round++) {
      const draw = () => 2 * random.next() - 1;
      const s: Segment = [draw(), draw(), draw(), draw(), draw(), draw()];
      const t: Segment = [draw(), draw(), draw(), draw(), draw(), draw()];
      const reach = random.next();
      const exact = Math.sqrt(squaredDistanceBetweenSegments(...s, ...t));
      // What the boxes are apart by, the long way round.
      const gaps = [0, 1, 2].map((k) =>
        Math.max(
          Math.min(s[k]!, s[k + 3]!) - Math.max(t[k]!, t[k + 3]!),
          Math.min(t[k]!, t[k + 3]!) - Math.max(s[k]!, s[k + 3]!),
        ),
      );
      const expected = Math.max(...gaps) > reach;
      expect(boxesApart(...s, ...t, reach)).toBe(expected);
      if (expected) expect(exact).toBeGreaterThan(reach);
      if (expected) apart++;
      else if (exact <= reach) near++;
    }
    expect(apart).toBeGreaterThan(200);
    expect(near).toBeGreaterThan(200);
  });

  it('give known values', () => {
    expect(squaredDistanceToSegment(0, 3, 4, -1, 0, 0, 1, 0, 0)).toBe(3 * 3 + 4 * 4);
    expect(squaredDistanceToSegment(4, 4, 0, -1, 0, 0, 1, 0, 0)).toBe(3 * 3 + 4 * 4);
    expect(squaredDistanceBetweenSegments(0, 0, 0, 1, 0, 0, 0.5, -1, 2, 0.5, 1, 2)).toBe(2 * 2);
    expect(squaredDistanceBetweenSegments(0, 0, 0, 1, 0, 0, 3, 1, 0, 5, 1, 0)).toBe(2 * 2 + 1);
  });
});

/** A grid of many tubes, and the tubes: some wholly or partly outside the box, some fat, some pointlike. */
function fill(grid: TubeGrid, random: Random, from: number, count: number): { tubes: Segment[]; radii: number[] } {
  const tubes: Segment[] = [];
  const radii: number[] = [];
  for (let i = 0; i < count; i++) {
    const draw = () => 1.4 * random.next() - 0.2;
    const a = [draw(), draw(), draw()] as const;
    const far = random.next() < 0.2 ? 0 : 0.6 * random.next();
    const b = a.map((x) => x + far * (2 * random.next() - 1)) as unknown as [number, number, number];
    tubes.push([...a, ...b]);
    radii.push(random.next() < 0.1 ? 0.2 : 0.02 * random.next());
    grid.add(from + i, ...a, ...b, radii[i]!);
  }
  return { tubes, radii };
}

/** Segments to ask about, each with a reach. */
function queries(random: Random, count: number): { at: Segment; reach: number }[] {
  return Array.from({ length: count }, () => {
    const draw = () => 1.2 * random.next() - 0.1;
    return { at: [draw(), draw(), draw(), draw(), draw(), draw()] as Segment, reach: 0.1 * random.next() };
  });
}

function found(grid: TubeGrid, { at, reach }: { at: Segment; reach: number }): number[] {
  const count = grid.gather(...at, reach);
  return Array.from(grid.found.subarray(0, count));
}
const sorted = (rows: readonly number[]) => [...rows].sort((a, b) => a - b);

describe('tube grid', () => {
  it('finds every tube that comes within reach, wherever it was listed', () => {
    const random = randomStream('grid', 'test');
    for (const cell of [0.05, 0.13, 0.4]) {
      const grid = new TubeGrid([0, 0, 0], [1, 1, 1], cell);
      const { tubes, radii } = fill(grid, random, 0, 150);
      let met = 0;
      queries(random, 200).forEach((query, q) => {
        const rows = found(grid, query);
        const known = new Set(rows);
        expect(known.size).toBe(rows.length);
        for (let i = 0; i < tubes.length; i++) {
          const distance = Math.sqrt(squaredDistanceBetweenSegments(...query.at, ...tubes[i]!));
          if (distance > query.reach + radii[i]!) continue;
          met++;
          expect(known.has(i), `cell ${cell}, query ${q}, tube ${i}`).toBe(true);
        }
      });
      expect(met).toBeGreaterThan(500);
    }
  });

  it('finds the same rows packed as loose, and what is added afterwards too, however often it is packed', () => {
    const random = randomStream('grid', 'packed');
    const loose = new TubeGrid([0, 0, 0], [1, 1, 1], 0.13);
    const packed = new TubeGrid([0, 0, 0], [1, 1, 1], 0.13);
    const asked = queries(random, 100);
    let from = 0;
    for (const stage of ['empty', 'first', 'second', 'third']) {
      const before = asked.map((query) => found(packed, query));
      packed.pack();
      // Within each cell the order is kept, so that who looks at a packed grid sees what others see in a loose one.
      const after = asked.map((query) => found(packed, query));
      expect(after, stage).toEqual(before);
      expect(after.map(sorted)).toEqual(asked.map((query) => sorted(found(loose, query))));
      // The same tubes into both; the packed one holds older ones in its other columns.
      const seed = `tubes ${stage}`;
      fill(packed, randomStream(seed, 'x'), from, 60);
      fill(loose, randomStream(seed, 'x'), from, 60);
      from += 60;
      expect(asked.map((query) => sorted(found(packed, query)))).toEqual(
        asked.map((query) => sorted(found(loose, query))),
      );
    }
    expect(asked.reduce((sum, query) => sum + found(packed, query).length, 0)).toBeGreaterThan(2000);
  });

  it('lists a row again after it has moved: found at both places, once a look', () => {
    const grid = new TubeGrid([0, 0, 0], [1, 1, 1], 0.1);
    grid.add(7, 0.1, 0.1, 0.1, 0.15, 0.1, 0.1, 0.01);
    grid.pack();
    grid.add(7, 0.9, 0.9, 0.9, 0.85, 0.9, 0.9, 0.01);
    const near = (x: number) => found(grid, { at: [x, x, x, x, x, x], reach: 0.02 });
    expect([near(0.1), near(0.9), near(0.5)]).toEqual([[7], [7], []]);
    expect(found(grid, { at: [0, 0, 0, 1, 1, 1], reach: 0.2 })).toEqual([7]);
  });

  it('answers another grid that reads its columns as itself, before and after rows and cells have changed', () => {
    const random = randomStream('grid', 'view');
    const reader = new TubeGrid([0, 0, 0], [1, 1, 1], Number.MAX_VALUE);
    const asked = queries(random, 60);
    let rows = 0;
    for (const [cell, count] of [
      [0.3, 40],
      [0.07, 900],
      [0.2, 30],
      [0.11, 3000],
    ] as const) {
      const grid = new TubeGrid([-0.1, 0, 0.05], [1, 1.1, 0.9], cell);
      fill(grid, random, 0, count);
      reader.adopt(grid.view());
      expect(reader.cell).toBe(grid.cell);
      for (const query of asked) expect(found(reader, query)).toEqual(found(grid, query));
      grid.pack();
      fill(grid, random, count, 20);
      reader.adopt(grid.view());
      for (const query of asked) {
        const own = found(grid, query);
        expect(found(reader, query)).toEqual(own);
        rows += own.length;
      }
    }
    expect(rows).toBeGreaterThan(10_000);
  });
});
