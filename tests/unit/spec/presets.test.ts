import { readdirSync, readFileSync, writeFileSync } from 'node:fs';
import { describe, expect, test } from 'vitest';
import { BEAN_HALF_AXES, beanStl } from '../../../presets/make-bean.ts';
import { parseSpec } from '../../../src/spec/parse.ts';
import { shapeFiles } from '../../../src/spec/shape-files.ts';

const FOLDER = new URL('../../../presets/', import.meta.url);
const presets = readdirSync(FOLDER).filter((file) => file.endsWith('.json') && file !== 'spec.schema.json');

describe('presets', () => {
  test('there are five', () => {
    expect(presets.sort()).toEqual([
      'bean.json',
      'explicit-points.json',
      'gel-block.json',
      'hollow-wall.json',
      'lobe.json',
    ]);
  });

  test.each(presets)('%s is sound, names the schema, says what it is for, and finds its files', (file) => {
    const text = readFileSync(new URL(file, FOLDER), 'utf8');
    const spec = parseSpec(text, file);
    expect(JSON.parse(text).$schema).toBe('./spec.schema.json');
    expect(spec.purpose).toMatch(/^[A-Z].*\.$/);
    for (const surface of shapeFiles(spec)) expect(readFileSync(new URL(surface, FOLDER)).length).toBeGreaterThan(0);
  });

  test('every sizing rule is shown by one of them', () => {
    const rules = presets.map((file) => parseSpec(readFileSync(new URL(file, FOLDER), 'utf8')).sizing.rule);
    expect(new Set(rules)).toEqual(new Set(['least-power', 'junction-exponent', 'pressure-matched']));
  });
});

type Point = readonly [number, number, number];

/** Corners of the triangles of a binary STL, read by its published layout: 80 bytes, count, then 50 bytes a triangle. */
function readTriangles(bytes: Uint8Array): [Point, Point, Point][] {
  const view = new DataView(bytes.buffer, bytes.byteOffset, bytes.byteLength);
  const count = view.getUint32(80, true);
  expect(bytes.length).toBe(84 + 50 * count);
  return Array.from({ length: count }, (_, row) => {
    const point = (corner: number): Point => {
      const at = 84 + 50 * row + 12 + 12 * corner;
      return [view.getFloat32(at, true), view.getFloat32(at + 4, true), view.getFloat32(at + 8, true)];
    };
    return [point(0), point(1), point(2)];
  });
}

/** Turns of a closed surface round a point: 1 inside, 0 outside. Source: van Oosterom & Strackee (1983); from memory. */
function turnsRound(triangles: readonly [Point, Point, Point][], at: Point): number {
  let sum = 0;
  for (const triangle of triangles) {
    const [a, b, c] = triangle.map((p) => [p[0] - at[0], p[1] - at[1], p[2] - at[2]] as Point) as [Point, Point, Point];
    const [la, lb, lc] = [Math.hypot(...a), Math.hypot(...b), Math.hypot(...c)];
    const under = la * lb * lc + dot(a, b) * lc + dot(b, c) * la + dot(c, a) * lb;
    sum += 2 * Math.atan2(dot(a, cross(b, c)), under);
  }
  return sum / (4 * Math.PI);
}

const dot = (a: Point, b: Point) => a[0] * b[0] + a[1] * b[1] + a[2] * b[2];
const cross = (a: Point, b: Point): Point => [
  a[1] * b[2] - a[2] * b[1],
  a[2] * b[0] - a[0] * b[2],
  a[0] * b[1] - a[1] * b[0],
];

describe('bean.stl', () => {
  const bytes = beanStl();
  const triangles = readTriangles(bytes);

  test('the file is what its script makes (UPDATE=1 writes it)', () => {
    const file = new URL('bean.stl', FOLDER);
    if (process.env.UPDATE === '1') writeFileSync(file, bytes);
    expect(Buffer.compare(readFileSync(file), bytes)).toBe(0);
  });

  test('closed and of one sense: every edge is met once each way', () => {
    const edges = new Map<string, number>();
    for (const [a, b, c] of triangles) {
      for (const [p, q] of [
        [a, b],
        [b, c],
        [c, a],
      ] as const) {
        edges.set(`${p} ${q}`, (edges.get(`${p} ${q}`) ?? 0) + 1);
      }
    }
    expect(edges.size).toBe(3 * triangles.length);
    for (const [edge, count] of edges) {
      expect(count).toBe(1);
      expect(edges.has(edge.split(' ').reverse().join(' '))).toBe(true);
    }
    // Euler: V − E + F = 2 for a surface like a ball.
    const corners = new Set(triangles.flat().map(String)).size;
    expect(corners - (3 * triangles.length) / 2 + triangles.length).toBe(2);
  });

  test('outward, and of the volume its shape has', () => {
    const volume = triangles.reduce((sum, [a, b, c]) => sum + dot(a, cross(b, c)) / 6, 0);
    // Bending keeps the volume (second theorem of Pappus); flat facets cut a little off.
    const smooth = (4 / 3) * Math.PI * BEAN_HALF_AXES[0] * BEAN_HALF_AXES[1] * BEAN_HALF_AXES[2];
    expect(volume / smooth).toBeGreaterThan(0.97);
    expect(volume / smooth).toBeLessThan(1);
  });

  test('hollow on one side: half way between two places inside lies outside', () => {
    const left: Point = [-5, -4.5, 0];
    const right: Point = [5, -4.5, 0];
    expect(turnsRound(triangles, left)).toBeCloseTo(1, 9);
    expect(turnsRound(triangles, right)).toBeCloseTo(1, 9);
    expect(turnsRound(triangles, [0, -4.5, 0])).toBeCloseTo(0, 9);
    expect(turnsRound(triangles, [0, 0, 0])).toBeCloseTo(1, 9);
  });

  test('no sliver', () => {
    for (const [a, b, c] of triangles) {
      for (const [p, q, r] of [
        [a, b, c],
        [b, c, a],
        [c, a, b],
      ] as const) {
        const u: Point = [q[0] - p[0], q[1] - p[1], q[2] - p[2]];
        const v: Point = [r[0] - p[0], r[1] - p[1], r[2] - p[2]];
        expect((Math.atan2(Math.hypot(...cross(u, v)), dot(u, v)) * 180) / Math.PI).toBeGreaterThan(15);
      }
    }
  });
});
