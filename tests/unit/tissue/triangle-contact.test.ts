import { describe, expect, it } from 'vitest';
import { apartMeet, cornerMeet, edgeMeet, spaceSide } from '../../../src/tissue/triangle-contact.ts';

type Point = readonly [number, number, number];

/** Puts points side by side, turned out of the axes' planes, and gives their offsets. */
function placed(points: readonly Point[], turned: boolean): Float64Array {
  const turn = ([x, y, z]: Point): Point =>
    turned ? [(2 * x - y + 2 * z) / 3, (2 * x + 2 * y - z) / 3, (2 * z + 2 * y - x) / 3] : [x, y, z];
  return Float64Array.from(points.flatMap(turn));
}

const face: readonly Point[] = [
  [0, 0, 0],
  [4, 0, 0],
  [0, 4, 0],
];

describe.each([false, true])('triangles apart (turned: %s)', (turned) => {
  const meet = (other: readonly Point[]): boolean => {
    const p = placed([...face, ...other], turned);
    const all = [
      apartMeet(p, 0, 3, 6, 9, 12, 15),
      apartMeet(p, 9, 12, 15, 0, 3, 6),
      apartMeet(p, 3, 0, 6, 15, 12, 9),
      apartMeet(p, 6, 3, 0, 12, 9, 15),
    ];
    expect(new Set(all).size).toBe(1);
    return all[0]!;
  };
  it.each([
    [
      'crossing',
      [
        [1, 1, -1],
        [1, 1, 1],
        [9, 9, 1],
      ],
      true,
    ],
    [
      'through without an edge of the first',
      [
        [1, 1, -1],
        [1.2, 1, 1],
        [1, 1.2, 1],
      ],
      true,
    ],
    [
      'in one plane, overlapping',
      [
        [1, 1, 0],
        [5, 1, 0],
        [1, 5, 0],
      ],
      true,
    ],
    [
      'in one plane, a star',
      [
        [3, 3, 0],
        [-1, 3, 0],
        [3, -1, 0],
      ],
      true,
    ],
    [
      'in one plane, one in the other',
      [
        [0.5, 0.5, 0],
        [1, 0.5, 0],
        [0.5, 1, 0],
      ],
      true,
    ],
    [
      'in one plane, apart',
      [
        [3, 3, 0],
        [5, 3, 0],
        [3, 5, 0],
      ],
      false,
    ],
    [
      'in one plane, apart by a hair',
      [
        [2.001, 2.001, 0],
        [5, 2.001, 0],
        [2.001, 5, 0],
      ],
      false,
    ],
    [
      'in parallel planes',
      [
        [1, 1, 0.001],
        [5, 1, 0.001],
        [1, 5, 0.001],
      ],
      false,
    ],
    [
      'a plane crossed beside the triangle',
      [
        [3, 3, -1],
        [3, 3, 1],
        [9, 9, 1],
      ],
      false,
    ],
    [
      'far apart',
      [
        [10, 0, 0],
        [11, 0, 0],
        [10, 1, 5],
      ],
      false,
    ],
  ] as const)('%s', (_, other, expected) => {
    expect(meet(other)).toBe(expected);
  });
});

describe('triangles apart, exact touches', () => {
  const meet = (other: readonly Point[]): boolean => apartMeet(placed([...face, ...other], false), 0, 3, 6, 9, 12, 15);
  it.each([
    [
      'a corner on the face',
      [
        [1, 1, 0],
        [1, 1, 1],
        [2, 2, 1],
      ],
    ],
    [
      'a corner on an edge',
      [
        [2, 0, 0],
        [2, -1, 1],
        [3, -1, 1],
      ],
    ],
    [
      'a corner on a corner',
      [
        [0, 0, 0],
        [-1, -1, 1],
        [-1, 1, 1],
      ],
    ],
    [
      'an edge across an edge',
      [
        [2, -1, 0],
        [2, 1, 0],
        [2, 0, 3],
      ],
    ],
    [
      'an edge along an edge',
      [
        [1, 0, 0],
        [3, 0, 0],
        [2, -1, 1],
      ],
    ],
  ] as const)('%s', (_, other) => {
    expect(meet(other)).toBe(true);
  });
});

describe('triangles with a common corner or edge', () => {
  it('meet elsewhere or not', () => {
    const fan = (d: Point, e: Point): boolean => cornerMeet(placed([...face, d, e], false), 0, 3, 6, 9, 12);
    expect(fan([-1, 0, 0], [0, -1, 0])).toBe(false);
    expect(fan([-1, 1, 2], [1, -1, 2])).toBe(false);
    expect(fan([1, 1, -1], [1, 1, 1])).toBe(true);
    expect(fan([9, 9, -1], [9, 9, 1])).toBe(true);
    expect(fan([1, 1, 0], [1, 0.5, 0])).toBe(true);
    expect(fan([4, 4, 0], [5, 5, 3])).toBe(true);
    const fold = (apex: Point): boolean => edgeMeet(placed([...face, apex], false), 0, 3, 6, 9);
    expect(fold([0, -4, 0])).toBe(false);
    expect(fold([1, 2, 0])).toBe(true);
    expect(fold([1, 2, 1e-6])).toBe(false);
    expect(fold([1, -2, 1e-6])).toBe(false);
  });

  it('take a determinant within its rounding for zero', () => {
    const p = Float64Array.of(0, 0, 0, 0.1, 0.2, 0.3, 0.7, 0.1, 0.4, 0.1 + 0.7, 0.2 + 0.1, 0.3 + 0.4);
    expect(spaceSide(p, 0, 3, 6, 9)).toBe(0);
    p[11] = 0.7 + 1e-14;
    expect(spaceSide(p, 0, 3, 6, 9)).not.toBe(0);
  });
});
