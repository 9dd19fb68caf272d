import { describe, expect, test } from 'vitest';
import { findCrossings, trianglesCross } from '../../../../src/check/lumen/crossings.ts';
import { volumeSign } from '../../../../src/check/lumen/signs.ts';
import { randomStream } from '../../../../src/core/random.ts';

const both = (position: number[], triangle: number[]) =>
  trianglesCross(Float64Array.from(position), Int32Array.from(triangle), 0, 1);

describe('two triangles', () => {
  const FIRST = [0, 0, 0, 4, 0, 0, 0, 4, 0];
  const apart: [string, number[], number[], boolean][] = [
    ['one through the other', [...FIRST, 1, 1, -1, 1, 1, 1, 9, 9, 1], [0, 1, 2, 3, 4, 5], true],
    ['planes cross, triangles do not', [...FIRST, 5, 5, -1, 5, 5, 1, 9, 9, 1], [0, 1, 2, 3, 4, 5], false],
    ['one above the other', [...FIRST, 0, 0, 1, 4, 0, 1, 0, 4, 1], [0, 1, 2, 3, 4, 5], false],
    ['a corner that touches', [...FIRST, 1, 1, 0, 1, 1, 1, 2, 1, 1], [0, 1, 2, 3, 4, 5], true],
    ['in one plane, apart', [...FIRST, 3, 3, 0, 4, 4, 0, 3, 4, 0], [0, 1, 2, 3, 4, 5], false],
    ['in one plane, overlapping', [...FIRST, 1, 1, 0, 4, 4, 0, 3, 4, 0], [0, 1, 2, 3, 4, 5], true],
    ['in one plane, one inside the other', [...FIRST, 1, 1, 0, 1.5, 1, 0, 1, 1.5, 0], [0, 1, 2, 3, 4, 5], true],
    ['a shared corner only', [...FIRST, -1, 0, 1, 0, -1, 1], [0, 1, 2, 0, 3, 4], false],
    ['a shared corner, in one plane', [...FIRST, -1, 0, 0, 0, -1, 0], [0, 1, 2, 0, 3, 4], false],
    ['a shared corner, then through', [...FIRST, 2, 2, 1, 2, 2, -1], [0, 1, 2, 0, 3, 4], true],
    ['a shared corner, overlapping in one plane', [...FIRST, 2, 1, 0, 1, 2, 0], [0, 1, 2, 0, 3, 4], true],
    ['a shared edge', [...FIRST, 0, -1, 1], [0, 1, 2, 1, 0, 3], false],
    ['a shared edge, flat', [...FIRST, 0, -1, 0], [0, 1, 2, 1, 0, 3], false],
    ['a shared edge, folded back', [...FIRST, 1, 1, 0], [0, 1, 2, 1, 0, 3], true],
    ['the same triangle', FIRST, [0, 1, 2, 2, 1, 0], true],
  ];
  test.each(apart)('%s', (_, position, triangle, wanted) => {
    expect(both(position, triangle)).toBe(wanted);
    expect(both(position, [...triangle.slice(3), ...triangle.slice(0, 3)])).toBe(wanted);
    // Exact scaling and turning of the axes change nothing.
    expect(
      both(
        position.map((x) => x * 1024),
        triangle,
      ),
    ).toBe(wanted);
    expect(
      both(
        position.map((_, k) => position[3 * Math.floor(k / 3) + ((k + 1) % 3)]!),
        triangle,
      ),
    ).toBe(wanted);
  });
});

test('the sign of a volume is exact where doubles are not', () => {
  // d lies on the plane x + y + z = 1 but for one unit in the last place.
  const tiny = Number.EPSILON / 2;
  const at = (z: number) => volumeSign(Float64Array.from([1, 0, 0, 0, 1, 0, 0, 0, 1, 0.25, 0.25, z]), 0, 1, 2, 3);
  expect(at(0.5)).toBe(0);
  expect(at(0.5 + 2 * tiny)).toBe(-at(0.5 - tiny));
  expect(at(0.5 - tiny)).not.toBe(0);
});

test('the search finds what trying all pairs finds', () => {
  const random = randomStream('1', 'crossings');
  const faces = 600;
  const position = new Float64Array(9 * faces);
  for (let f = 0; f < faces; f++) {
    const at = [random.next(), random.next(), random.next()];
    for (let k = 0; k < 9; k++) position[9 * f + k] = at[k % 3]! + 0.15 * (random.next() - 0.5);
  }
  const triangle = Int32Array.from({ length: 3 * faces }, (_, k) => k);
  const wanted: string[] = [];
  for (let f = 0; f < faces; f++) {
    for (let g = f + 1; g < faces; g++) if (trianglesCross(position, triangle, f, g)) wanted.push(`${f}-${g}`);
  }
  const got: string[] = [];
  findCrossings({ position, triangle }, (f, g) => got.push(`${f}-${g}`));
  expect(wanted.length).toBeGreaterThan(20);
  expect(got.sort()).toEqual(wanted.sort());
});
