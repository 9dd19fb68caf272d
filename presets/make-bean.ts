import { writeFileSync } from 'node:fs';
import { fileURLToPath } from 'node:url';

// Makes bean.stl, the closed surface of the preset `bean`: an ellipsoid bent round a circle, like a kidney bean. Its inner
// side is hollow, so that straight vessels between two places inside may leave it.
//
//   UPDATE=1 npx vitest run --config tests/vitest.config.ts tests/unit/spec/presets.test.ts     (any Node)
//   node --experimental-strip-types presets/make-bean.ts                                        (Node 22.6 and later)

/** mm; half axes of the ellipsoid along the arc, in the plane of the arc and across it. */
export const BEAN_HALF_AXES = [10, 3.8, 3.5] as const;
/** mm; radius of the circle along which the long axis is bent; above the second half axis, so that it does not fold. */
export const BEAN_BEND = 6;

interface Ball {
  /** Unit vectors. */
  readonly points: [number, number, number][];
  /** Corner rows, counter-clockwise from outside. */
  readonly triangles: [number, number, number][];
}

/** The bean as binary STL: little-endian, millimetres, 1280 triangles, normals outward. */
export function beanStl(): Uint8Array {
  const { points, triangles } = splitBall(splitBall(splitBall(icosahedron())));
  // Rounded to single precision first, so that normals belong to the corners the file holds.
  const corners = points.map(([x, y, z]) => bend(x, y, z).map(Math.fround));
  const bytes = new Uint8Array(84 + 50 * triangles.length);
  const view = new DataView(bytes.buffer);
  bytes.set(new TextEncoder().encode('bean, millimetres, closed, normals outward'));
  view.setUint32(80, triangles.length, true);
  triangles.forEach((triangle, row) => {
    const [a, b, c] = triangle.map((corner) => corners[corner] as number[]) as [number[], number[], number[]];
    [...normalOf(a, b, c), ...a, ...b, ...c].forEach((value, at) => {
      view.setFloat32(84 + 50 * row + 4 * at, value, true);
    });
  });
  return bytes;
}

/** A point of the unit ball's surface → mm on the bean. The hollow side faces −y, its middle is at (0, −3.8, 0). */
function bend(x: number, y: number, z: number): [number, number, number] {
  const [along, within, across] = BEAN_HALF_AXES;
  const angle = (along * x) / BEAN_BEND;
  const radius = BEAN_BEND + within * y;
  return [radius * Math.sin(angle), radius * Math.cos(angle) - BEAN_BEND, across * z];
}

/** Twelve corners, twenty faces. */
function icosahedron(): Ball {
  const g = (1 + Math.sqrt(5)) / 2;
  const points: [number, number, number][] = [
    [-1, g, 0],
    [1, g, 0],
    [-1, -g, 0],
    [1, -g, 0],
    [0, -1, g],
    [0, 1, g],
    [0, -1, -g],
    [0, 1, -g],
    [g, 0, -1],
    [g, 0, 1],
    [-g, 0, -1],
    [-g, 0, 1],
  ];
  const triangles: [number, number, number][] = [
    [0, 11, 5],
    [0, 5, 1],
    [0, 1, 7],
    [0, 7, 10],
    [0, 10, 11],
    [1, 5, 9],
    [5, 11, 4],
    [11, 10, 2],
    [10, 7, 6],
    [7, 1, 8],
    [3, 9, 4],
    [3, 4, 2],
    [3, 2, 6],
    [3, 6, 8],
    [3, 8, 9],
    [4, 9, 5],
    [2, 4, 11],
    [6, 2, 10],
    [8, 6, 7],
    [9, 8, 1],
  ];
  return { points: points.map(toUnit), triangles };
}

/** Each triangle into four, new corners on the unit ball, each edge split once. */
function splitBall(ball: Ball): Ball {
  const points = [...ball.points];
  const middles = new Map<string, number>();
  const middle = (a: number, b: number): number => {
    const key = a < b ? `${a} ${b}` : `${b} ${a}`;
    const known = middles.get(key);
    if (known !== undefined) return known;
    const p = points[a] as [number, number, number];
    const q = points[b] as [number, number, number];
    points.push(toUnit([p[0] + q[0], p[1] + q[1], p[2] + q[2]]));
    middles.set(key, points.length - 1);
    return points.length - 1;
  };
  const triangles = ball.triangles.flatMap(([a, b, c]): [number, number, number][] => {
    const ab = middle(a, b);
    const bc = middle(b, c);
    const ca = middle(c, a);
    return [
      [a, ab, ca],
      [ab, b, bc],
      [ca, bc, c],
      [ab, bc, ca],
    ];
  });
  return { points, triangles };
}

function toUnit([x, y, z]: [number, number, number]): [number, number, number] {
  const length = Math.sqrt(x * x + y * y + z * z);
  return [x / length, y / length, z / length];
}

function normalOf(a: number[], b: number[], c: number[]): [number, number, number] {
  const u = [0, 1, 2].map((axis) => (b[axis] ?? 0) - (a[axis] ?? 0)) as [number, number, number];
  const v = [0, 1, 2].map((axis) => (c[axis] ?? 0) - (a[axis] ?? 0)) as [number, number, number];
  return toUnit([u[1] * v[2] - u[2] * v[1], u[2] * v[0] - u[0] * v[2], u[0] * v[1] - u[1] * v[0]]);
}

if (process.argv[1] === fileURLToPath(import.meta.url)) writeFileSync(new URL('bean.stl', import.meta.url), beanStl());
