import { describe, expect, test } from 'vitest';
import { listEdges, measureComponents } from '../../../../src/check/lumen/topology.ts';
import { weldCorners } from '../../../../src/check/lumen/weld.ts';

type Point = readonly [number, number, number];

/** Triangles of a tetrahedron, outward. */
function tetrahedron([x, y, z]: Point, size: number): Point[][] {
  const [a, b, c, d] = [
    [x, y, z],
    [x + size, y, z],
    [x, y + size, z],
    [x, y, z + size],
  ] as [Point, Point, Point, Point];
  return [
    [a, c, b],
    [a, b, d],
    [b, c, d],
    [a, d, c],
  ];
}

/** A torus of n × n quadrilaterals, each cut in two. */
function torus(n: number): Point[][] {
  const at = (i: number, j: number): Point => {
    const u = (2 * Math.PI * (i % n)) / n;
    const v = (2 * Math.PI * (j % n)) / n;
    const r = 3 + Math.cos(v);
    return [r * Math.cos(u), r * Math.sin(u), Math.sin(v)];
  };
  const faces: Point[][] = [];
  for (let i = 0; i < n; i++) {
    for (let j = 0; j < n; j++) {
      faces.push([at(i, j), at(i + 1, j), at(i + 1, j + 1)], [at(i, j), at(i + 1, j + 1), at(i, j + 1)]);
    }
  }
  return faces;
}

function measure(faces: readonly Point[][]) {
  const solids = { corner: Float64Array.from(faces.flat(2)), solid: new Int32Array(faces.length), names: ['wall'] };
  const mesh = weldCorners(solids);
  return { mesh, ...measureComponents(mesh, listEdges(mesh)) };
}

describe('how surfaces hang together', () => {
  test('a tetrahedron: one part, V − E + F = 2, volume s³/6', () => {
    const { mesh, count, euler, volume, fans } = measure(tetrahedron([1, 2, 3], 2));
    expect(mesh.position.length / 3).toBe(4);
    expect([count, ...euler]).toEqual([1, 4 - 6 + 4]);
    expect(volume[0]).toBeCloseTo(8 / 6, 12);
    expect([...fans]).toEqual([1, 1, 1, 1]);
  });

  test('inside out: the volume is negative', () => {
    expect(measure(tetrahedron([0, 0, 0], 1).map((face) => face.toReversed())).volume[0]).toBeCloseTo(-1 / 6, 12);
  });

  test('a torus: V − E + F = 0', () => {
    const { count, euler, volume } = measure(torus(12));
    expect([count, ...euler]).toEqual([1, 0]);
    expect(volume[0]).toBeGreaterThan(0);
  });

  test('two parts that touch in a corner are two parts, and the corner has two fans', () => {
    const { mesh, count, euler, fans } = measure([...tetrahedron([0, 0, 0], 1), ...tetrahedron([1, 0, 0], 1)]);
    expect(mesh.position.length / 3).toBe(7);
    expect([count, ...euler]).toEqual([2, 2, 2]);
    expect([...fans].sort()).toEqual([1, 1, 1, 1, 1, 1, 2]);
  });

  test('0 and −0 are one place', () => {
    expect(
      weldCorners({ corner: Float64Array.from([0, 0, 0, -0, 0, -0]), solid: new Int32Array(0), names: [] }).position,
    ).toHaveLength(3);
  });
});
