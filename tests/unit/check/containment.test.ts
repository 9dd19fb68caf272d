import fc from 'fast-check';
import { describe, expect, test } from 'vitest';
import { checkTree } from '../../../src/check/check-tree.ts';
import { measureContainment } from '../../../src/check/containment.ts';
import { measureShape } from '../../../src/check/depth.ts';
import { Tally } from '../../../src/check/result.ts';
import type { TriangleSurface } from '../../../src/core/surface.ts';
import type { Shape, Spec } from '../../../src/spec/types.ts';
import { buildRecord, HAND_SPEC, HAND_TREE, type HandNode, leastPowerRadius } from '../../support/check-forests.ts';

const NONE = new Map();
const RADIUS = leastPowerRadius(HAND_SPEC);

function depthOf(nodes: readonly HandNode[], radius: number, tissue: Shape): Tally {
  const { forest } = buildRecord(nodes, HAND_SPEC, () => radius);
  const tally = new Tally({
    id: 'containment',
    title: '',
    sense: 'at-least',
    limit: 0,
    unit: 'm',
    nameOf: String,
    describe: () => '',
    cap: 100,
  });
  measureContainment(forest, measureShape(tissue, NONE), new Map(), tally);
  return tally;
}

/** One straight tube, ends in mm. */
function tube(a: HandNode['at'], b: HandNode['at']): HandNode[] {
  return [
    { parent: -1, at: a },
    { parent: 0, at: b, share: 1 },
  ];
}

describe('depth of one tube, by hand', () => {
  const box: Shape = { shape: 'box', min: [0, 0, 0], max: [0.02, 0.02, 0.02] };

  test('along a wall', () => {
    // Axis 1 mm from the wall z = 0, radius 0.9 mm: 0.1 mm are left.
    const tally = depthOf(tube([5, 10, 1], [15, 10, 1]), 0.9e-3, box);
    expect(tally.worst).toBeCloseTo(1e-4, 8);
    expect(tally.failures).toBe(0);
    const out = depthOf(tube([5, 10, 1], [15, 10, 1]), 1.1e-3, box);
    expect(out.worst).toBeCloseTo(-1e-4, 8);
    expect(out.failures).toBe(1);
  });

  test('between rings: the wall is square to no ring point', () => {
    // The shallowest line lies at 45°, where no ring point need be.
    const tally = depthOf(tube([1, 1, 5], [1, 1, 15]), 0.5e-3, {
      shape: 'sphere',
      center: [0.01, 0.01, 0.01],
      radius: 0.02,
    });
    // Rim points at z = 5 and 15 mm, 9√2 mm + 0.5 mm from the axis of the sphere's centre.
    const across = 0.009 * Math.SQRT2 + 0.0005;
    expect(tally.worst).toBeCloseTo(0.02 - Math.hypot(across, 0.005), 8);
  });

  test('a hole half-way, both ends well inside', () => {
    const tissue: Shape = {
      shape: 'difference',
      of: box,
      minus: [{ shape: 'sphere', center: [0.01, 0.01, 0.0125], radius: 0.002 }],
    };
    // The tube's top at z = 10.6 mm reaches 0.1 mm into the ball, whose lowest point is z = 10.5 mm.
    const tally = depthOf(tube([3, 10, 10], [17, 10, 10]), 0.6e-3, tissue);
    expect(tally.worst).toBeCloseTo(-1e-4, 6);
    expect(depthOf(tube([3, 10, 10], [17, 10, 10]), 0.4e-3, tissue).worst).toBeCloseTo(1e-4, 6);
  });

  test('the rim of an end', () => {
    // Ends 0.2 mm before the wall x = 20 mm.
    expect(depthOf(tube([10, 10, 10], [19.8, 10, 10]), 1e-3, box).worst).toBeCloseTo(2e-4, 9);
    expect(depthOf(tube([10, 10, 10], [20.1, 10, 10]), 1e-3, box).worst).toBeCloseTo(-1e-4, 9);
  });
});

// Dense sampling, 8 times finer each way, may find a point deeper out only by what lies between samples.
test('random tubes in a hollow ball, against dense sampling', () => {
  const tissue: Shape = {
    shape: 'difference',
    of: { shape: 'ellipsoid', center: [0.01, 0.01, 0.01], radii: [0.01, 0.008, 0.006] },
    minus: [{ shape: 'sphere', center: [0.012, 0.01, 0.01], radius: 0.002 }],
  };
  const { depth } = measureShape(tissue, NONE);
  const mm = fc.double({ min: 4, max: 16, noNaN: true });
  fc.assert(
    fc.property(
      fc.tuple(mm, mm, mm),
      fc.tuple(mm, mm, mm),
      fc.double({ min: 0.05, max: 1, noNaN: true }),
      (a, b, r) => {
        const length = Math.hypot(b[0] - a[0], b[1] - a[1], b[2] - a[2]);
        fc.pre(length > 0.1);
        const got = depthOf(tube(a, b), r / 1000, tissue).worst;
        const u = [0, 1, 2].map((k) => (b[k as 0] - a[k as 0]) / length) as [number, number, number];
        const v = square(u);
        const w = [u[1] * v[2] - u[2] * v[1], u[2] * v[0] - u[0] * v[2], u[0] * v[1] - u[1] * v[0]] as const;
        let wanted = Infinity;
        const steps = Math.ceil(length / (r / 16));
        for (let s = 0; s <= steps; s++) {
          for (let k = 0; k < 128; k++) {
            const [c, d] = [Math.cos((k * Math.PI) / 64), Math.sin((k * Math.PI) / 64)];
            const at = (axis: 0 | 1 | 2) =>
              (a[axis] + (s / steps) * (b[axis] - a[axis]) + r * (c * v[axis] + d * w[axis])) / 1000;
            wanted = Math.min(wanted, depth(at(0), at(1), at(2)));
          }
        }
        expect(got).toBeLessThan(wanted + 0.1 * (r / 1000));
        expect(got).toBeGreaterThan(wanted - 0.01 * (r / 1000));
      },
    ),
    { seed: 1, numRuns: 40 },
  );
});

describe('in a tissue from a spec', () => {
  const surface = cube(20);
  const spec = (tissue: Shape, forbidden: Shape[] = []): Spec => ({ ...HAND_SPEC, tissue, forbidden });
  const good = buildRecord(HAND_TREE, HAND_SPEC);
  const containment = (of: Spec, surfaces: ReadonlyMap<string, TriangleSurface> = NONE, record = good) => {
    const result = checkTree(record, of, surfaces);
    return {
      ...result.promises.find((promise) => promise.id === 'containment')!,
      findings: result.findings.filter((finding) => finding.promise === 'containment'),
    };
  };

  test('a surface gives what the box gives', () => {
    const box = containment(spec(HAND_SPEC.tissue));
    const got = containment(spec({ shape: 'surface', file: 'cube.stl', unit: 'mm' }), new Map([['cube.stl', surface]]));
    expect(got.held).toBe(true);
    expect(got.where).toBe(box.where);
    expect(got.worst).toBeCloseTo(box.worst!, 9);
  });

  test('a surface that is not given', () => {
    const got = containment(spec({ shape: 'surface', file: 'cube.stl', unit: 'mm' }));
    expect(got.held).toBe(null);
    expect(got.note).toBe('not checked: no surface given for cube.stl');
  });

  test('a forbidden part', () => {
    const inWay = spec(HAND_SPEC.tissue, [{ shape: 'sphere', center: [0.009, 0.006, 0.01], radius: 1e-4 }]);
    const got = containment(inWay);
    expect(got.held).toBe(false);
    expect(got.findings.map((finding) => finding.vessel).sort()).toEqual(['supply:5', 'supply:6', 'supply:7']);
  });

  test('the stub is no stub where the root lies deep', () => {
    const deep = HAND_TREE.map((node, row) => (row === 0 ? { ...node, at: [2, 10, 10] as const } : node));
    const got = containment(spec(HAND_SPEC.tissue), NONE, buildRecord(deep, HAND_SPEC));
    expect(got.note).not.toContain('exempt');
    expect(got.checked).toBe(8);
  });

  test('a first vessel that crosses empty space is no stub', () => {
    // A thin plate at the inlet, and the block a good way behind it.
    const plate = { shape: 'box', min: [0, 0, 0], max: [5e-5, 0.02, 0.02] } as const;
    const block = { shape: 'box', min: [0.0024, 0, 0], max: [0.02, 0.02, 0.02] } as const;
    const got = containment(spec({ shape: 'union', parts: [plate, block] }));
    expect(got.held).toBe(false);
    expect(got.findings.map((finding) => finding.vessel)).toContain('supply:0');
    expect(got.note).not.toContain('exempt');
  });

  test('a random vessel pushed out is the one that is named', () => {
    const terminals = [4, 5, 7, 8];
    fc.assert(
      fc.property(fc.constantFrom(...terminals), fc.constantFrom(0, 1, 2), fc.boolean(), (row, axis, high) => {
        const nodes = HAND_TREE.map((node, k) =>
          k === row ? { ...node, at: node.at.map((x, j) => (j === axis ? (high ? 20.01 : -0.01) : x)) as never } : node,
        );
        const got = containment(spec(HAND_SPEC.tissue), NONE, buildRecord(nodes, HAND_SPEC));
        expect(got.held).toBe(false);
        expect(got.findings.map((finding) => finding.vessel)).toEqual([`supply:${row - 1}`]);
        expect(got.findings[0]!.value).toBeLessThanOrEqual(-0.9e-5);
        expect(got.findings[0]!.value).toBeGreaterThan(-1e-5 - RADIUS(1e-6 / 240) * 1.001);
      }),
      { seed: 1, numRuns: 30 },
    );
  });
});

/** A unit vector square to another. */
function square(u: readonly [number, number, number]): [number, number, number] {
  const flat = Math.hypot(u[0], u[1]);
  return flat > 0.1
    ? [-u[1] / flat, u[0] / flat, 0]
    : [0, -u[2] / Math.hypot(u[1], u[2]), u[1] / Math.hypot(u[1], u[2])];
}

function cube(size: number): TriangleSurface {
  const position = Float64Array.from(
    [0, 1, 2, 3, 4, 5, 6, 7].flatMap((k) => [k & 1, (k >> 1) & 1, k >> 2].map((x) => x * size)),
  );
  const triangle = Int32Array.from(
    [
      [0, 2, 1, 1, 2, 3],
      [4, 5, 6, 5, 7, 6],
      [0, 1, 4, 1, 5, 4],
      [2, 6, 3, 3, 6, 7],
      [0, 4, 2, 2, 4, 6],
      [1, 3, 5, 3, 7, 5],
    ].flat(),
  );
  return { position, triangle };
}
