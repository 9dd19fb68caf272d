import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { InputError } from '../../src/core/errors.ts';
import { decodeSurface } from '../../src/formats/surface/surface-formats.ts';
import type { Shape, Triple } from '../../src/spec/types.ts';
import { checkSurface } from '../../src/tissue/check-surface.ts';
import { tubeInside } from '../../src/tissue/tube.ts';
import { objText, plyBinary, plyText, stlBinary, stlText, text } from '../support/surface-files.ts';
import { bean, notchedCube, torus } from '../support/surfaces.ts';
import { tissueOf } from '../support/tissue-twins.ts';

/** Fixed, so that a failure can be replayed; fast-check prints it with the case. */
const RUNS = { seed: 20, numRuns: 40 };

const surfaces = { notch: notchedCube(), bean: bean(2), torus: torus(0.8, 0.3, 16, 8) };
const real = (min: number, max: number): fc.Arbitrary<number> => fc.double({ min, max, noNaN: true });
const point = fc.tuple(real(-1, 1), real(-1, 1), real(-1, 1));
const primitive: fc.Arbitrary<Shape> = fc.oneof(
  fc
    .tuple(point, real(0.1, 1), real(0.1, 1), real(0.1, 1))
    .map(([[x, y, z], a, b, c]): Shape => ({ shape: 'box', min: [x - a, y - b, z - c], max: [x + a, y + b, z + c] })),
  fc.tuple(point, real(0.1, 1)).map(([center, radius]): Shape => ({ shape: 'sphere', center, radius })),
  fc
    .tuple(point, real(0.05, 1.5), real(0.05, 1.5), real(0.05, 1.5))
    .map(([center, a, b, c]): Shape => ({ shape: 'ellipsoid', center, radii: [a, b, c] })),
  fc
    .tuple(point, point, real(0.1, 1))
    .filter(([from, to]) => Math.hypot(from[0] - to[0], from[1] - to[1], from[2] - to[2]) > 0.05)
    .map(([from, to, radius]): Shape => ({ shape: 'cylinder', from, to, radius })),
  fc.constantFrom('notch', 'bean', 'torus').map((file): Shape => ({ shape: 'surface', file, unit: 'm' })),
);
const combined: fc.Arbitrary<Shape> = fc.oneof(
  { weight: 2, arbitrary: primitive },
  {
    weight: 1,
    arbitrary: fc.array(primitive, { minLength: 1, maxLength: 3 }).map((parts): Shape => ({ shape: 'union', parts })),
  },
  {
    weight: 1,
    arbitrary: fc
      .array(primitive, { minLength: 2, maxLength: 3 })
      .map((parts): Shape => ({ shape: 'intersection', parts })),
  },
  {
    weight: 2,
    arbitrary: fc
      .tuple(primitive, primitive, primitive)
      .map(([of, a, b]): Shape => ({ shape: 'difference', of, minus: [a, b] })),
  },
);
const wide = fc.tuple(real(-3, 3), real(-3, 3), real(-3, 3));

/** The tissue, or null where the parts leave none. */
function built(shape: Shape) {
  try {
    return tissueOf(shape, surfaces);
  } catch (error) {
    if (error instanceof InputError) return null;
    throw error;
  }
}

describe('any tissue', () => {
  it('has a depth that changes no faster than position, agrees with its questions, and lies in its box', () => {
    let seen = 0;
    fc.assert(
      fc.property(combined, fc.array(wide, { minLength: 8, maxLength: 8 }), (shape, points) => {
        const tissue = built(shape);
        if (tissue === null) return;
        seen++;
        const depth = points.map((p) => tissue.depth(...p));
        points.forEach((p, i) => {
          for (let j = 0; j < i; j++) {
            const q = points[j]!;
            const apart = Math.hypot(p[0] - q[0], p[1] - q[1], p[2] - q[2]);
            expect(Math.abs(depth[i]! - depth[j]!)).toBeLessThanOrEqual(apart + 1e-12);
            const need = depth[j]!;
            expect(tissue.deeperThan(...p, need)).toBe(depth[i]! >= need);
          }
          if (depth[i]! >= 0)
            for (const axis of [0, 1, 2] as const) {
              // Within the box, and no deeper than the way to its sides.
              expect(p[axis] - tissue.min[axis]).toBeGreaterThanOrEqual(depth[i]! - 1e-12);
              expect(tissue.max[axis] - p[axis]).toBeGreaterThanOrEqual(depth[i]! - 1e-12);
            }
        });
        // Near the boundary, where answers are closest to wrong.
        const [p, q] = [points[0]!, points[1]!];
        const between = (t: number): Triple => [
          p[0] + t * (q[0] - p[0]),
          p[1] + t * (q[1] - p[1]),
          p[2] + t * (q[2] - p[2]),
        ];
        for (let i = 1; i < 20; i++) {
          const [a, b] = [between(i / 20), between(i / 20 + 1e-7)];
          expect(Math.abs(tissue.depth(...a) - tissue.depth(...b))).toBeLessThanOrEqual(
            1e-7 * Math.hypot(p[0] - q[0], p[1] - q[1], p[2] - q[2]) + 1e-12,
          );
        }
      }),
      RUNS,
    );
    expect(seen).toBeGreaterThan(25);
  });

  it('takes no tube that leaves it by more than a thousandth', () => {
    let taken = 0;
    const tube = fc.tuple(point, point, real(0.001, 0.2), real(0, 1));
    fc.assert(
      fc.property(combined, fc.array(tube, { minLength: 12, maxLength: 12 }), (shape, tubes) => {
        const tissue = built(shape);
        if (tissue === null) return;
        for (const [a, b, need, share] of tubes) {
          const end = a.map((v, i) => v + share * (b[i]! - v)) as unknown as Triple;
          if (!tubeInside(tissue, ...a, ...end, need)) continue;
          taken++;
          let least = Number.POSITIVE_INFINITY;
          for (let i = 0; i <= 300; i++) {
            const t = i / 300;
            const at = (axis: 0 | 1 | 2): number => a[axis] + t * (end[axis] - a[axis]);
            least = Math.min(least, tissue.depth(at(0), at(1), at(2)));
          }
          expect(least).toBeGreaterThanOrEqual(need * (1 - 1e-3) - 1e-12);
        }
      }),
      RUNS,
    );
    expect(taken).toBeGreaterThan(20);
  });

  it('keeps a scale: lengths times k, depth times k, volume times k³', () => {
    fc.assert(
      fc.property(
        primitive.filter((shape) => shape.shape !== 'surface'),
        point,
        real(1e-4, 1e3),
        (shape, p, k) => {
          const one = tissueOf(shape);
          const other = tissueOf(scaledShape(shape, k));
          const [a, b] = [one.depth(...p), other.depth(k * p[0], k * p[1], k * p[2])];
          expect(Math.abs(b / k - a)).toBeLessThan(1e-12);
          expect(other.volume / (k * k * k) / one.volume).toBeCloseTo(1, 12);
        },
      ),
      RUNS,
    );
  });
});

function scaledShape(shape: Shape, k: number): Shape {
  const by = (p: Triple): Triple => [k * p[0], k * p[1], k * p[2]];
  switch (shape.shape) {
    case 'box':
      return { shape: 'box', min: by(shape.min), max: by(shape.max) };
    case 'sphere':
      return { shape: 'sphere', center: by(shape.center), radius: k * shape.radius };
    case 'ellipsoid':
      return { shape: 'ellipsoid', center: by(shape.center), radii: by(shape.radii) };
    case 'cylinder':
      return { shape: 'cylinder', from: by(shape.from), to: by(shape.to), radius: k * shape.radius };
    default:
      return shape;
  }
}

describe('any bytes', () => {
  const sound = [
    ['a.stl', stlBinary(notchedCube())],
    ['a.stl', text(stlText(notchedCube()))],
    ['a.ply', text(plyText(notchedCube()))],
    ['a.ply', plyBinary(notchedCube(), true)],
    ['a.ply', plyBinary(notchedCube(), false)],
    ['a.obj', text(objText(notchedCube()))],
  ] as const;
  const read = (bytes: Uint8Array, file: string): void => {
    try {
      checkSurface(decodeSurface(bytes, file), file);
    } catch (error) {
      expect(error).toBeInstanceOf(InputError);
    }
  };

  it('are read as a surface or refused as input, never a crash of ours', () => {
    fc.assert(
      fc.property(
        fc.constantFrom('a.stl', 'a.ply', 'a.obj'),
        fc.uint8Array({ maxLength: 400 }),
        fc.boolean(),
        (file, tail, led) => {
          const head = led
            ? text({ 'a.stl': 'solid x\nfacet ', 'a.ply': 'ply\nformat ascii 1.0\n', 'a.obj': 'v 0 0 0\n' }[file])
            : [];
          read(Uint8Array.from([...head, ...tail]), file);
        },
      ),
      { ...RUNS, numRuns: 600 },
    );
  });

  it('with a few of them changed in a sound file, as well', () => {
    fc.assert(
      fc.property(
        fc.constantFrom(...sound),
        fc.array(fc.tuple(fc.nat(), fc.integer({ min: 0, max: 255 })), { minLength: 1, maxLength: 4 }),
        ([file, whole], changes) => {
          const bytes = whole.slice();
          for (const [at, byte] of changes) bytes[at % bytes.length] = byte;
          read(bytes, file);
        },
      ),
      { ...RUNS, numRuns: 1500 },
    );
  });
});
