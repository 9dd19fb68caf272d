import { describe, expect, it } from 'vitest';
import { randomStream } from '../../../src/core/random.ts';
import { fermatCost, fermatInteriorCost, fermatPoint } from '../../../src/physics/fermat.ts';
import { flowWeight } from '../../../src/physics/murray.ts';

type Point = readonly [number, number, number];

const out = new Float64Array(3);

function place(a: Point, b: Point, c: Point, wa: number, wb: number, wc: number): number {
  return fermatPoint(...a, ...b, ...c, wa, wb, wc, out);
}

function cost(a: Point, b: Point, c: Point, wa: number, wb: number, wc: number): number {
  return fermatCost(out[0]!, out[1]!, out[2]!, ...a, ...b, ...c, wa, wb, wc);
}

// Source: Fermat–Torricelli–Weber problem, Gilbert EN 1967 (Bell Syst Tech J 46:2209); from memory and computed to 40
// digits by two independent implementations. Tolerances as given there: cost 1e-9 relative, position 1e-6 × size.
const TABLE: readonly [string, Point, Point, Point, readonly [number, number] | null, number, Point, number][] = [
  ['equal weights, 3-4-5', [0, 0, 0], [4, 0, 0], [0, 3, 0], null, -1, [0.6957885341, 0.7511761065, 0], 6.766432567522],
  ['symmetric', [0, 0, 0], [10, 5, 0], [10, -5, 0], [1, 1], -1, [3.476169867, 0, 0], 21.95709752426],
  [
    'asymmetric, flows 3:1',
    [0, 0, 0],
    [10, 2, 3],
    [6, -5, 1],
    [3, 1],
    -1,
    [3.015922412, -0.280983593, 0.7906905203],
    29.4342333952,
  ],
  [
    'asymmetric, flows 1:7',
    [0, 0, 0],
    [8, 3, 0],
    [9, -4, 2],
    [1, 7],
    -1,
    [3.956168607, -1.112077001, 0.7039024348],
    44.27809544215,
  ],
  ['collapse on the root', [0, 0, 0], [3, 4, 0], [3, -4, 0], [1, 1], 0, [0, 0, 0], 10],
  ['collapse on a sink', [0, 0, 0], [5, 0, 0], [10, 1, 0], [1, 1], 1, [5, 0, 0], 13.03602477343],
  ['flows 8:1', [0, 0, 0], [6, 0, 0], [7, 4, 1], [8, 1], -1, [5.247455303, 0.1470743024, 0.0367685756], 30.12554320973],
  ['collapse on a sink, flows 8:1', [0, 0, 0], [6, 0, 0], [8, 3, 1], [8, 1], 1, [6, 0, 0], 29.70214965231],
  ['collapse on the root, flows 4:1', [0, 0, 0], [5, 0, 0], [-1, 3, 0], [4, 1], 0, [0, 0, 0], 15.76148815912],
];

describe('fermatPoint', () => {
  for (const [name, a, b, c, flows, corner, point, value] of TABLE) {
    it(`finds the published optimum: ${name}`, () => {
      const weights: Point =
        flows === null ? [1, 1, 1] : [flowWeight(flows[0] + flows[1]), flowWeight(flows[0]), flowWeight(flows[1])];
      expect(place(a, b, c, ...weights)).toBe(corner);
      for (let k = 0; k < 3; k++) expect(Math.abs(out[k]! - point[k]!)).toBeLessThan(1e-8 * 10);
      expect(Math.abs(cost(a, b, c, ...weights) / value - 1)).toBeLessThan(1e-9);
    });
  }

  // Same source: critical angles for a collapse with w = Q^(2/3), degrees.
  const CRITICAL = [
    [1, 74.9346224, 142.532689, 142.532689],
    [0.75, 74.9944874, 138.307621, 146.697892],
    [0.5, 75.2762035, 132.431632, 152.292164],
    [0.25, 76.2217476, 123.177831, 160.600422],
    [0.1, 78.0671734, 113.34181, 168.591016],
    [0.01, 83.0698119, 99.5536544, 177.376534],
  ] as const;
  for (const [ratio, ...angles] of CRITICAL) {
    it(`collapses at the critical angles of flow ratio ${ratio}`, () => {
      const weights = [flowWeight(1 + ratio), flowWeight(1), flowWeight(ratio)] as const;
      for (let corner = 0; corner < 3; corner++) {
        for (const side of [-1, 1]) {
          // The corner under test at the origin, the two others at unequal distances under the angle ± 1e-5 degrees.
          const angle = ((angles[corner]! + side * 1e-5) * Math.PI) / 180;
          const points: Point[] = [];
          points[corner] = [0, 0, 0];
          points[(corner + 1) % 3] = [2, 0, 0];
          points[(corner + 2) % 3] = [3 * Math.cos(angle), 0, 3 * Math.sin(angle)];
          expect(place(points[0]!, points[1]!, points[2]!, ...weights)).toBe(side > 0 ? corner : -1);
        }
      }
    });
  }

  it('is no dearer than anything near it, on random triangles and weights', () => {
    const random = randomStream('fermat', 'test');
    const draw = (): Point => [random.next(), random.next(), random.next()];
    let inside = 0;
    for (let round = 0; round < 2000; round++) {
      const [a, b, c] = [draw(), draw(), draw()];
      const flows = [random.next(), random.next()] as const;
      const weights = [flowWeight(flows[0] + flows[1]), flowWeight(flows[0]), flowWeight(flows[1])] as const;
      if (place(a, b, c, ...weights) < 0) inside++;
      const best = cost(a, b, c, ...weights);
      const at = Array.from(out);
      for (const step of [1e-1, 1e-3, 1e-5]) {
        for (let k = 0; k < 6; k++) {
          out.set(at);
          out[k >> 1]! += k & 1 ? step : -step;
          expect(cost(a, b, c, ...weights)).toBeGreaterThanOrEqual(best * (1 - 1e-14));
        }
      }
      out.set(at);
    }
    expect(inside).toBeGreaterThan(500);
    expect(inside).toBeLessThan(1900);
  });

  it('agrees with the closed form of the least cost', () => {
    const random = randomStream('fermat', 'cost');
    const draw = (): Point => [random.next(), random.next(), random.next()];
    const between = (p: Point, q: Point) => Math.hypot(p[0] - q[0], p[1] - q[1], p[2] - q[2]);
    for (let round = 0; round < 2000; round++) {
      const [a, b, c] = [draw(), draw(), draw()];
      const weights = [1 + random.next(), 1 + random.next(), 1 + random.next()] as const;
      if (place(a, b, c, ...weights) >= 0) continue;
      const closed = fermatInteriorCost(between(b, c), between(c, a), between(a, b), ...weights);
      expect(Math.abs(cost(a, b, c, ...weights) / closed - 1)).toBeLessThan(1e-12);
    }
  });

  it('takes points that coincide or lie on a line', () => {
    const [p, q, r]: Point[] = [
      [1 / 3, 2 / 3, 1e-6],
      [1, 2, 3],
      [2, 4, 6],
    ];
    expect(place(p!, p!, q!, 1, 0.7, 0.7)).toBe(0);
    expect(place(q!, p!, p!, 1, 0.7, 0.7)).toBe(1);
    expect(place(p!, q!, p!, 1, 0.7, 0.7)).toBe(0);
    expect(place(p!, p!, p!, 1, 0.7, 0.7)).toBe(0);
    expect(Array.from(out)).toEqual(Array.from(p!));
    expect(place([0, 0, 0], q!, r!, 1, 0.7, 0.7)).toBe(1);
    expect(place(q!, [0, 0, 0], r!, 1, 0.7, 0.7)).toBe(0);
    expect(place(r!, [0, 0, 0], q!, 1, 0.7, 0.7)).toBe(2);
    // A line along (1, 3, 7)/3 whose coordinates are not exact: still the middle point, or one that costs the same.
    const line = (t: number): Point => [t / 3, t, (7 * t) / 3];
    const corner = place(line(0), line(0.1), line(0.3), 1, 0.7, 0.7);
    expect([-1, 1]).toContain(corner);
    expect(Math.abs(out[1]! - 0.1)).toBeLessThan(1e-12);
  });

  it('lets the heaviest point win where weights make no triangle', () => {
    const points: [Point, Point, Point] = [
      [0, 0, 0],
      [1, 0, 0],
      [0, 1, 0],
    ];
    expect(place(...points, 2, 1, 1)).toBe(0);
    expect(place(...points, 1, 3, 1)).toBe(1);
    expect(place(...points, 1, 1, 4)).toBe(2);
    expect(place(...points, 0, 0, 1)).toBe(2);
    expect(Number.isFinite(out[0]!)).toBe(true);
  });

  it('does not care for the size of lengths and flows', () => {
    const a: Point = [0, 0, 0];
    const b: Point = [10, 2, 3];
    const c: Point = [6, -5, 1];
    place(a, b, c, flowWeight(4), flowWeight(3), flowWeight(1));
    const want = Array.from(out);
    for (const scale of [2 ** -60, 2 ** -20, 2 ** 40]) {
      for (const flow of [2 ** -90, 2 ** -45, 2 ** 30]) {
        const times = (p: Point): Point => [p[0] * scale, p[1] * scale, p[2] * scale];
        place(a, times(b), times(c), flowWeight(4 * flow), flowWeight(3 * flow), flowWeight(flow));
        for (let k = 0; k < 3; k++) expect(out[k]! / scale / want[k]!).toBeCloseTo(1, 12);
      }
    }
  });

  it('keeps its digits in a triangle as thin as the trade makes them', () => {
    // A trunk of 10⁷ terminals and a last terminal close beside it: the junction lies where the force balance says.
    const weights = [flowWeight(1e7 + 1), flowWeight(1e7), flowWeight(1)] as const;
    place([0, 0, 0], [1, 0, 0], [0.5, 1e-4, 0], ...weights);
    const [x, y] = [out[0]!, out[1]!];
    const pull = [0, 0];
    for (const [p, w] of [
      [[0, 0], weights[0]],
      [[1, 0], weights[1]],
      [[0.5, 1e-4], weights[2]],
    ] as const) {
      const away = Math.hypot(p[0] - x, p[1] - y);
      pull[0]! += (w * (p[0] - x)) / away;
      pull[1]! += (w * (p[1] - y)) / away;
    }
    expect(Math.hypot(pull[0]!, pull[1]!)).toBeLessThan(1e-6 * weights[2]);
  });
});
