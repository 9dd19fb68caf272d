import { describe, expect, it } from 'vitest';
import { outlineTissue, piecesNear } from '../../../viewer/ghost.ts';

const outline = (tissue: unknown) => outlineTissue(JSON.stringify({ tissue }));

/** (pieces) both ends of every line. */
function ends(points: readonly number[]): number[][] {
  const list = [];
  for (let i = 0; i < points.length; i += 3) list.push(points.slice(i, i + 3));
  return list;
}

describe('outlineTissue', () => {
  it('gives a box its twelve edges, in metres whatever the unit', () => {
    for (const [key, size] of [
      ['mm', 1],
      ['um', 1e3],
      ['m', 1e-3],
    ] as const) {
      const box = { shape: 'box', [`min_${key}`]: [0, 0, 0], [`max_${key}`]: [12 * size, 10 * size, 6 * size] };
      const points = ends(outline(box).points);
      expect(points).toHaveLength(2 * 12);
      for (let k = 0; k < 3; k++) {
        const along = [12e-3, 10e-3, 6e-3][k]!;
        const values = new Set(points.map((point) => Number(point[k]!.toPrecision(9))));
        expect([...values].sort()).toEqual([0, along]);
      }
      for (let i = 0; i < points.length; i += 2) {
        expect(points[i]!.filter((x, k) => x !== points[i + 1]![k])).toHaveLength(1);
      }
    }
  });

  it('takes lengths without a unit as metres', () => {
    const { points } = outline({ shape: 'box', min: [0, 0, 0], max: [1, 2, 3] });
    expect(Math.max(...points)).toBe(3);
  });

  it('keeps every point of a ball, an ellipsoid and a cylinder on its surface', () => {
    for (const [x, y, z] of ends(outline({ shape: 'sphere', center_mm: [1, 2, 3], radius_mm: 4 }).points)) {
      expect(Math.hypot(x! - 1e-3, y! - 2e-3, z! - 3e-3)).toBeCloseTo(4e-3, 12);
    }
    const radii = [2e-3, 3e-3, 5e-3];
    for (const point of ends(outline({ shape: 'ellipsoid', center_mm: [0, 0, 0], radii_mm: [2, 3, 5] }).points)) {
      expect(Math.hypot(...point.map((x, k) => x / radii[k]!))).toBeCloseTo(1, 12);
    }
    const cylinder = outline({ shape: 'cylinder', from_mm: [0, 0, 0], to_mm: [3, 4, 0], radius_mm: 2 });
    for (const [x, y, z] of ends(cylinder.points)) {
      const along = 0.6 * x! + 0.8 * y!;
      expect(Math.min(Math.abs(along), Math.abs(along - 5e-3))).toBeLessThan(1e-15);
      expect(Math.hypot(x! - 0.6 * along, y! - 0.8 * along, z!)).toBeCloseTo(2e-3, 12);
    }
  });

  it('outlines each part of combined shapes and names what it cannot', () => {
    const ball = { shape: 'sphere', center_mm: [0, 0, 0], radius_mm: 1 };
    const one = outline(ball).points.length;
    expect(outline({ shape: 'union', parts: [ball, ball] }).points).toHaveLength(2 * one);
    expect(outline({ shape: 'difference', of: ball, minus: [ball, ball] }).points).toHaveLength(3 * one);
    expect(outline({ ...ball, forbidden: [ball] }).points).toHaveLength(2 * one);
    const file = outline({ shape: 'union', parts: [ball, { shape: 'surface', file: 'bean.stl', unit: 'mm' }] });
    expect(file.points).toHaveLength(one);
    expect(file.left).toEqual(['surface']);
  });

  it('can leave out pieces of combined shapes that lie far from the vessels', () => {
    const ball = { shape: 'sphere', center_mm: [0, 0, 0], radius_mm: 1 };
    const away = { shape: 'box', min_mm: [-9, -9, -9], max_mm: [9, 9, 0] };
    const { points, combined } = outline({ shape: 'intersection', parts: [ball, away] });
    expect(combined).toBe(true);
    expect(outline(ball).combined).toBe(false);
    expect(piecesNear(points, [-1e-3, -1e-3, -1e-3], [1e-3, 1e-3, 1e-3])).toEqual(outline(ball).points);
    // Half of the ball's box: nothing is left above it by more than a tenth of the diagonal of 2 × 2 × 1.
    const half = piecesNear(points, [-1e-3, -1e-3, -1e-3], [1e-3, 1e-3, 0]);
    expect(Math.max(...half.filter((_, i) => i % 3 === 2))).toBeLessThanOrEqual(0.1 * 3e-3 + 1e-12);
    expect(half.length).toBeGreaterThan(0);
  });

  it('draws nothing, and throws nothing, for what is no spec', () => {
    for (const text of [
      null,
      '',
      '{',
      '[]',
      '{"tissue":7}',
      '{"tissue":{"shape":"box","min_mm":[0,0],"max_mm":"x"}}',
    ]) {
      expect(outlineTissue(text).points).toEqual([]);
    }
    expect(outlineTissue('null').left).toEqual(['unreadable spec']);
  });
});
