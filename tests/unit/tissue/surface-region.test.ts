import { describe, expect, it } from 'vitest';
import { randomStream } from '../../../src/core/random.ts';
import type { TriangleSurface } from '../../../src/core/surface.ts';
import { shellVolumes, windingNumber } from '../../../src/tissue/surface-measures.ts';
import { surfaceNormals } from '../../../src/tissue/surface-normals.ts';
import { surfaceTopology } from '../../../src/tissue/surface-topology.ts';
import { ball, bean, cube, insideOut, moved, notchedCube, together, torus } from '../../support/surfaces.ts';
import { boxPoint, bruteDistance, rayInside, surfaceTissue, tissueOf } from '../../support/tissue-twins.ts';

const hollow = together(ball(2), insideOut(moved(ball(1), ([x, y, z]) => [0.4 * x + 0.1, 0.4 * y, 0.4 * z])));
const spiky = moved(ball(2), ([x, y, z]) => {
  const k = 0.4 + 0.6 * Math.abs(Math.sin(7 * x + 3 * y - 5 * z));
  return [k * x, k * y, k * z];
});
const surfaces: readonly (readonly [string, TriangleSurface])[] = [
  ['cube', cube()],
  ['notched cube', notchedCube()],
  ['bean', bean(3)],
  ['torus', torus(2, 0.5, 24, 12)],
  ['ball with a hollow', hollow],
  ['spiky ball', spiky],
];

describe.each(surfaces)('%s', (_, surface) => {
  const tissue = surfaceTissue(surface);

  it('has the distance of its nearest triangle and the sign of a ray', () => {
    const random = randomStream('twin', 'surface');
    let inside = 0;
    for (let i = 0; i < 400; i++) {
      const p = boxPoint(tissue, random, 1.2);
      const d = tissue.depth(...p);
      expect(Math.abs(Math.abs(d) - bruteDistance(surface, p))).toBeLessThan(1e-13);
      expect(d > 0).toBe(rayInside(surface, p));
      expect(windingNumber(surface, ...p)).toBeCloseTo(d > 0 ? 1 : 0, 9);
      if (d > 0) inside++;
    }
    expect(inside).toBeGreaterThan(40);
  });

  it('has the right sign just off its corners, edges and faces', () => {
    const random = randomStream('near', 'surface');
    for (let i = 0; i < 300; i++) {
      const e = Math.floor(random.next() * surface.triangle.length);
      const t = e - (e % 3);
      const corner = (k: number): readonly number[] => {
        const row = 3 * surface.triangle[t + ((e + k) % 3)]!;
        return [...surface.position.slice(row, row + 3)];
      };
      const share = i % 3 === 0 ? [1, 0, 0] : i % 3 === 1 ? [0.6, 0.4, 0] : [0.5, 0.3, 0.2];
      const off = [0, 1, 2].map(() => 1e-5 * (random.next() - 0.5));
      const p = [0, 1, 2].map(
        (axis) =>
          share[0]! * corner(0)[axis]! + share[1]! * corner(1)[axis]! + share[2]! * corner(2)[axis]! + off[axis]!,
      ) as unknown as readonly [number, number, number];
      expect(tissue.depth(...p) > 0).toBe(rayInside(surface, p));
    }
  });

  it('answers "deeper than" as depth does, whatever was asked before', () => {
    const random = randomStream('ask', 'surface');
    const fresh = surfaceTissue(surface);
    for (let i = 0; i < 1500; i++) {
      const p = boxPoint(tissue, random, 1.2);
      const need = 0.2 * (random.next() - 0.3);
      const d = tissue.depth(...p);
      expect(fresh.deeperThan(...p, need)).toBe(d >= need);
      expect(tissue.deeperThan(...p, d)).toBe(true);
      expect(fresh.depth(...p)).toBe(d);
    }
  });
});

describe('normals of a surface', () => {
  it('at a corner weigh faces by their angle, however many triangles cut them', () => {
    const { cornerNormal, edgeNormal } = surfaceNormals(cube(), surfaceTopology(cube()));
    // One or two triangles of each face meet at a corner of the cube; the normal is the diagonal all the same.
    const { position, triangle } = cube();
    for (let i = 0; i < position.length; i++)
      expect(cornerNormal[i]).toBeCloseTo((position[i]! * 2 - 1) / Math.sqrt(3), 14);
    for (let e = 0; e < triangle.length; e++) {
      const to = triangle[e % 3 === 2 ? e - 2 : e + 1]!;
      let along = 0;
      for (let axis = 0; axis < 3; axis++)
        along += (position[3 * to + axis]! - position[3 * triangle[e]! + axis]!) * edgeNormal[3 * e + axis]!;
      expect(Math.abs(along)).toBeLessThan(1e-15);
    }
  });
});

describe('volume of a closed surface', () => {
  it('is exact for a polyhedron, in the unit of the file', () => {
    expect(surfaceTissue(cube()).volume).toBeCloseTo(1, 14);
    expect(surfaceTissue(notchedCube(), 'mm').volume).toBeCloseTo((1 - 0.4 * 0.6) * 1e-9, 22);
    expect(surfaceTissue(cube(), 'um').max[0]).toBe(1e-6);
    expect(surfaceTissue(cube()).volumeError).toBe(0);
  });
  it('of a fine torus tends to 2π²Rr², of an n × m one it is smaller by the area of its polygons', () => {
    const [n, m] = [90, 60];
    // Circles cut to regular n-gons: area of an n-gon in a circle of radius r is (n/2) sin(2π/n) r².
    const tube = (m / 2) * Math.sin((2 * Math.PI) / m) * 0.25;
    const pappus = 2 * Math.PI * 2 * tube;
    const ring = ((n / 2) * Math.sin((2 * Math.PI) / n)) / Math.PI;
    expect(surfaceTissue(torus(2, 0.5, n, m)).volume / (pappus * ring)).toBeCloseTo(1, 6);
  });
  it('keeps its digits far from the origin', () => {
    const far = moved(cube(), ([x, y, z]) => [x + 1000, y - 2000, z + 3000]);
    expect(shellVolumes(far, null, 1)[0]).toBeCloseTo(1, 11);
  });
  it('of a sheared ball is that of the ellipsoid it came from', () => {
    const straight = moved(ball(3), ([x, y, z]) => [x, 0.5 * y, 0.45 * z]);
    // The shear moves corners, not the curved faces between them: the polyhedra differ by their fineness.
    expect(surfaceTissue(bean(3)).volume / surfaceTissue(straight).volume).toBeCloseTo(1, 2);
  });
});

describe('convexity of a surface', () => {
  it('is seen where every edge is convex', () => {
    expect(surfaceTissue(cube()).convex).toBe(true);
    expect(surfaceTissue(ball(2)).convex).toBe(true);
    for (const [name, surface] of surfaces)
      if (name !== 'cube') expect(surfaceTissue(surface).convex, name).toBe(false);
    expect(surfaceTissue(together(cube(), cube(2, 3))).convex).toBe(false);
  });
});

describe('surfaces among other shapes', () => {
  it('may be cut, each use in its own unit', () => {
    const tissue = tissueOf(
      {
        shape: 'difference',
        of: { shape: 'surface', file: 'a.stl', unit: 'm' },
        minus: [{ shape: 'surface', file: 'b.stl', unit: 'mm' }],
      },
      { 'a.stl': cube(), 'b.stl': cube(250, 750) },
    );
    expect(tissue.depth(0.5, 0.5, 0.5)).toBeCloseTo(-0.25, 15);
    expect(tissue.depth(0.125, 0.5, 0.5)).toBeCloseTo(0.125, 15);
    // The lattice of the integration falls on the faces of both cubes.
    expect(tissue.volume).toBeCloseTo(1 - 0.5 * 0.5 * 0.5, 12);
  });
});
