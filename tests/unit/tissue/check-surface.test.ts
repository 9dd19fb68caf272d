import { describe, expect, it } from 'vitest';
import { InputError } from '../../../src/core/errors.ts';
import type { TriangleSurface } from '../../../src/core/surface.ts';
import { checkSurface } from '../../../src/tissue/check-surface.ts';
import { selfContacts } from '../../../src/tissue/self-contact.ts';
import {
  ball,
  bean,
  cube,
  flipped,
  insideOut,
  moved,
  notchedCube,
  surfaceOf,
  together,
  torus,
  without,
} from '../../support/surfaces.ts';

function refusal(surface: TriangleSurface): InputError {
  try {
    checkSurface(surface, 'lobe.stl');
  } catch (error) {
    if (error instanceof InputError) return error;
    throw error;
  }
  throw new Error('accepted');
}

const codes = (surface: TriangleSurface): string[] => refusal(surface).faults.map((fault) => fault.code);

describe('checkSurface', () => {
  it('says how many edges are open and where one is', () => {
    expect(refusal(without(cube(), 0)).message).toBe(
      'lobe.stl: got an open surface: 3 edges of one triangle only, e.g. (1, 0, 0) to (0, 0, 0), expected every edge shared by two',
    );
  });

  it('reports every kind of fault at once', () => {
    const two = together(
      without(ball(1), 3),
      moved(flipped(ball(1), 4), ([x, y, z]) => [x + 0.7, y, z]),
    );
    expect(codes(two)).toEqual(['open-surface', 'inconsistent-orientation', 'self-crossing']);
  });

  it('refuses numbers and rows that are none', () => {
    expect(codes({ position: Float64Array.of(0, 0, Number.NaN), triangle: Int32Array.of(0, 1, -2) })).toEqual([
      'non-finite',
      'bad-index',
    ]);
    expect(codes(surfaceOf([], []))).toEqual(['empty-surface']);
    expect(codes(moved(cube(), ([x, y, z]) => [x, 1e200 * y, z]))).toEqual(['out-of-range']);
    expect(codes(moved(cube(), ([x, y, z]) => [1e-200 * x, 1e-200 * y, 1e-200 * z]))).toEqual(['degenerate-triangle']);
  });

  it('counts pieces and hollows', () => {
    const small = moved(ball(1), ([x, y, z]) => [0.3 * x, 0.3 * y, 0.3 * z]);
    const left = moved(small, ([x, y, z]) => [x - 0.5, y, z]);
    const right = moved(small, ([x, y, z]) => [x + 0.5, y, z]);
    const inHollow = moved(small, ([x, y, z]) => [0.3 * x - 0.5, 0.3 * y, 0.3 * z]);
    expect(checkSurface(ball(2), '')).toMatchObject({ pieces: 1, hollows: 0 });
    expect(checkSurface(together(ball(2), together(insideOut(left), insideOut(right))), '')).toMatchObject({
      pieces: 1,
      hollows: 2,
    });
    // A piece in a hollow lies outside the tissue round it.
    expect(checkSurface(together(together(ball(2), insideOut(left)), inHollow), '')).toMatchObject({
      pieces: 2,
      hollows: 1,
    });
    expect(codes(together(ball(2), left))).toEqual(['nested-piece']);
    expect(codes(together(together(ball(2), insideOut(left)), insideOut(inHollow)))).toEqual(['inside-out']);
    expect(
      codes(
        together(
          ball(2),
          moved(insideOut(small), ([x, y, z]) => [x + 3, y, z]),
        ),
      ),
    ).toEqual(['inside-out']);
  });

  it('finds crossings at any scale and place, and none in sound surfaces', () => {
    const sound = [cube(), notchedCube(), ball(3), bean(3), torus(2, 0.5, 40, 20)];
    for (const scale of [1e-9, 1, 1e9])
      for (const shift of [0, 17.3])
        for (const surface of sound) {
          const placed = moved(surface, ([x, y, z]) => [
            scale * (x + shift),
            scale * (y - shift),
            scale * (z + shift / 3),
          ]);
          expect(selfContacts(placed, 10)).toEqual([]);
          // The second of two equal bodies, a little aside, turned so that no edges run alike.
          const aside = moved(surface, ([x, y, z]) => [
            scale * (x + shift + 0.031),
            scale * (0.8 * y - 0.6 * z - shift + 0.017),
            scale * (0.6 * y + 0.8 * z + shift / 3 - 0.023),
          ]);
          expect(selfContacts(together(placed, aside), 10).length).toBeGreaterThan(0);
        }
  });

  it('finds every crossing that an all-pairs search by another method finds', () => {
    // Segments against planes with plain arithmetic: proper crossings only.
    const crossing = together(
      ball(2),
      moved(ball(2), ([x, y, z]) => [x + 0.83, y + 0.11, z - 0.07]),
    );
    const found = new Set(selfContacts(crossing, 1e6).map(({ first, second }) => `${first}-${second}`));
    let seen = 0;
    const faces = crossing.triangle.length / 3;
    for (let s = 0; s < faces; s++)
      for (let t = s + 1; t < faces; t++) {
        if (!properlyCross(crossing, s, t)) continue;
        seen++;
        expect(found.has(`${s}-${t}`)).toBe(true);
      }
    expect(seen).toBeGreaterThan(50);
    expect(found.size).toBe(seen);
  });

  it('refuses touches: a corner on a face, an edge on an edge, faces flat on each other', () => {
    const tip = (apex: readonly [number, number, number]): TriangleSurface =>
      surfaceOf(
        [
          apex,
          [apex[0] + 1, apex[1], apex[2] + 1],
          [apex[0] - 0.5, apex[1] + 0.9, apex[2] + 1],
          [apex[0] - 0.5, apex[1] - 0.9, apex[2] + 1],
        ],
        [
          [0, 2, 1],
          [0, 3, 2],
          [0, 1, 3],
          [1, 2, 3],
        ],
      );
    expect(codes(together(cube(), tip([0.3, 0.4, 1])))).toEqual(['self-crossing']);
    expect(codes(together(cube(), tip([0.5, 0.5, 1])))).toEqual(['self-crossing']);
    expect(codes(together(cube(), tip([0.5, 0, 1])))).toEqual(['self-crossing']);
    expect(checkSurface(together(cube(), tip([0.3, 0.4, 1.0001])), '').pieces).toBe(2);
    expect(
      codes(
        together(
          cube(),
          moved(cube(), ([x, y, z]) => [x + 1, y + 1, z]),
        ),
      ),
    ).toContain('self-crossing');
    expect(
      codes(
        together(
          cube(),
          moved(cube(), ([x, y, z]) => [x + 1, y, z]),
        ),
      ),
    ).toContain('self-crossing');
  });

  it('is quick with thousands of separate pieces', () => {
    const corners: [number, number, number][] = [];
    const faces: [number, number, number][] = [];
    for (let i = 0; i < 8000; i++) {
      const [x, y, z] = [i % 20, Math.floor(i / 20) % 20, Math.floor(i / 400)];
      corners.push([x, y, z], [x + 0.5, y, z], [x, y + 0.5, z], [x, y, z + 0.5]);
      const a = 4 * i;
      faces.push([a, a + 2, a + 1], [a, a + 1, a + 3], [a, a + 3, a + 2], [a + 1, a + 2, a + 3]);
    }
    // All-pairs winding numbers would take 8000 · 32000 arctangents: minutes.
    expect(checkSurface(surfaceOf(corners, faces), '').pieces).toBe(8000);
  });

  it('takes long thin triangles for what they are', () => {
    const needle = moved(torus(2, 0.5, 200, 6), ([x, y, z]) => [x, y, 1e-4 * z]);
    expect(checkSurface(needle, '').pieces).toBe(1);
  });
});

function properlyCross({ position, triangle }: TriangleSurface, s: number, t: number): boolean {
  const corner = (k: number): number[] => [...position.slice(3 * triangle[k]!, 3 * triangle[k]! + 3)];
  const volume = (a: number[], b: number[], c: number[], d: number[]): number => {
    const [u, v, w] = [a, b, c].map((p) => p.map((value, i) => value - d[i]!)) as [number[], number[], number[]];
    return (
      u[0]! * (v[1]! * w[2]! - v[2]! * w[1]!) +
      u[1]! * (v[2]! * w[0]! - v[0]! * w[2]!) +
      u[2]! * (v[0]! * w[1]! - v[1]! * w[0]!)
    );
  };
  const pierces = (edge: number, face: number): boolean => {
    const [p, q] = [corner(edge), corner(edge % 3 === 2 ? edge - 2 : edge + 1)];
    const [a, b, c] = [corner(3 * face), corner(3 * face + 1), corner(3 * face + 2)];
    if (volume(a, b, c, p) * volume(a, b, c, q) >= 0) return false;
    const sides = [volume(p, q, a, b), volume(p, q, b, c), volume(p, q, c, a)];
    return sides.every((v) => v > 0) || sides.every((v) => v < 0);
  };
  return [0, 1, 2].some((k) => pierces(3 * s + k, t) || pierces(3 * t + k, s));
}
