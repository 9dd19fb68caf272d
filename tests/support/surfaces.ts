import type { TriangleSurface } from '../../src/core/surface.ts';

type Point = readonly [number, number, number];

/** Surface from lists, for tests that build by hand. */
export function surfaceOf(points: readonly Point[], triangles: readonly Point[]): TriangleSurface {
  return { position: Float64Array.from(points.flat()), triangle: Int32Array.from(triangles.flat()) };
}

/** Corners moved by a map. */
export function moved(surface: TriangleSurface, map: (p: Point) => Point): TriangleSurface {
  const position = new Float64Array(surface.position.length);
  for (let i = 0; i < position.length; i += 3)
    position.set(map([surface.position[i]!, surface.position[i + 1]!, surface.position[i + 2]!]), i);
  return { position, triangle: surface.triangle };
}

/** Every triangle turned round. */
export function insideOut(surface: TriangleSurface): TriangleSurface {
  const triangle = surface.triangle.slice();
  for (let t = 0; t < triangle.length; t += 3) {
    triangle[t + 1] = surface.triangle[t + 2]!;
    triangle[t + 2] = surface.triangle[t + 1]!;
  }
  return { position: surface.position, triangle };
}

/** Two surfaces as one, corners not merged. */
export function together(a: TriangleSurface, b: TriangleSurface): TriangleSurface {
  const shift = a.position.length / 3;
  return {
    position: Float64Array.from([...a.position, ...b.position]),
    triangle: Int32Array.from([...a.triangle, ...[...b.triangle].map((row) => row + shift)]),
  };
}

/** Without one triangle. */
export function without(surface: TriangleSurface, t: number): TriangleSurface {
  const kept = [...surface.triangle].filter((_, i) => Math.floor(i / 3) !== t);
  return { position: surface.position, triangle: Int32Array.from(kept) };
}

/** With one triangle turned round. */
export function flipped(surface: TriangleSurface, t: number): TriangleSurface {
  const triangle = surface.triangle.slice();
  triangle[3 * t + 1] = surface.triangle[3 * t + 2]!;
  triangle[3 * t + 2] = surface.triangle[3 * t + 1]!;
  return { position: surface.position, triangle };
}

/** With one more triangle. */
export function withTriangle(surface: TriangleSurface, corners: Point): TriangleSurface {
  return { position: surface.position, triangle: Int32Array.from([...surface.triangle, ...corners]) };
}

/** Cube from `low` to `high` on every axis, 12 triangles. */
export function cube(low = 0, high = 1): TriangleSurface {
  return moved(
    extruded(
      [
        [0, 0],
        [1, 0],
        [1, 1],
        [0, 1],
      ],
      [
        [0, 1, 2],
        [0, 2, 3],
      ],
    ),
    (p) => [low + p[0] * (high - low), low + p[1] * (high - low), low + p[2] * (high - low)],
  );
}

/** Unit cube with a notch 0.4 wide and 0.6 deep cut into its top all along y: volume 1 − 0.4·0.6. Not convex. */
export function notchedCube(): TriangleSurface {
  return extruded(
    [
      [0, 0],
      [1, 0],
      [1, 1],
      [0.7, 1],
      [0.7, 0.4],
      [0.3, 0.4],
      [0.3, 1],
      [0, 1],
    ],
    [
      [1, 2, 3],
      [1, 3, 4],
      [0, 1, 4],
      [0, 4, 5],
      [0, 5, 6],
      [0, 6, 7],
    ],
  );
}

/** Polygon in (x, z), counter-clockwise, drawn out along y from 0 to 1. */
function extruded(outline: readonly (readonly [number, number])[], cap: readonly Point[]): TriangleSurface {
  const n = outline.length;
  const points: Point[] = [...outline.map(([x, z]): Point => [x, 0, z]), ...outline.map(([x, z]): Point => [x, 1, z])];
  // Seen from −y, (x, z) is right-handed: the cap at y = 0 keeps its order.
  const triangles: Point[] = [
    ...cap,
    ...cap.map(([a, b, c]): Point => [n + a, n + c, n + b]),
    ...outline.flatMap((_, i): Point[] => {
      const j = (i + 1) % n;
      return [
        [i, n + i, n + j],
        [i, n + j, j],
      ];
    }),
  ];
  return surfaceOf(points, triangles);
}

/** Octahedron halved `level` times and pushed to the unit sphere: 8·4^level triangles. Convex. */
export function ball(level: number): TriangleSurface {
  let points: Point[] = [
    [1, 0, 0],
    [-1, 0, 0],
    [0, 1, 0],
    [0, -1, 0],
    [0, 0, 1],
    [0, 0, -1],
  ];
  let triangles: Point[] = [
    [0, 2, 4],
    [2, 1, 4],
    [1, 3, 4],
    [3, 0, 4],
    [2, 0, 5],
    [1, 2, 5],
    [3, 1, 5],
    [0, 3, 5],
  ];
  for (let l = 0; l < level; l++) {
    const middle = new Map<string, number>();
    const next = [...points];
    const half = (a: number, b: number): number => {
      const key = a < b ? `${a}-${b}` : `${b}-${a}`;
      let row = middle.get(key);
      if (row === undefined) {
        const m = [0, 1, 2].map((i) => points[a]![i]! + points[b]![i]!) as [number, number, number];
        const length = Math.hypot(...m);
        row = next.push([m[0] / length, m[1] / length, m[2] / length]) - 1;
        middle.set(key, row);
      }
      return row;
    };
    triangles = triangles.flatMap(([a, b, c]): Point[] => {
      const [ab, bc, ca] = [half(a, b), half(b, c), half(c, a)];
      return [
        [a, ab, ca],
        [ab, b, bc],
        [ca, bc, c],
        [ab, bc, ca],
      ];
    });
    points = next;
  }
  return surfaceOf(points, triangles);
}

/** Bean: an ellipsoid of half-axes 1, 0.5, 0.45 sheared along y by 0.7·x², which keeps its volume. Not convex. */
export function bean(level: number): TriangleSurface {
  return moved(ball(level), ([x, y, z]) => [x, 0.5 * y + 0.7 * x * x, 0.45 * z]);
}

/** Torus about z: ring radius R, tube radius r, n × m quads. Crosses itself where r > R. */
export function torus(R: number, r: number, n: number, m: number): TriangleSurface {
  const points: Point[] = [];
  const triangles: Point[] = [];
  for (let i = 0; i < n; i++) {
    for (let j = 0; j < m; j++) {
      const u = (2 * Math.PI * i) / n;
      const v = (2 * Math.PI * (j + 0.5)) / m;
      const ring = R + r * Math.cos(v);
      points.push([ring * Math.cos(u), ring * Math.sin(u), r * Math.sin(v)]);
      const [a, b] = [i * m + j, ((i + 1) % n) * m + j];
      const [c, d] = [i * m + ((j + 1) % m), ((i + 1) % n) * m + ((j + 1) % m)];
      triangles.push([a, b, d], [a, d, c]);
    }
  }
  return surfaceOf(points, triangles);
}
