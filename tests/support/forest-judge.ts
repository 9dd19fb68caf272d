import { FIT_MARGIN, RUN_OUT } from '../../src/room/reach.ts';
import type { Room } from '../../src/room/room.ts';
import { plainForest } from './plain-forest.ts';

/*
 * A judge of feasibility that shares no geometry with the program: all pairs, depths sampled along each tube, balls by
 * bisection. O(n²), for a few hundred tubes.
 */

type Point = readonly [number, number, number];

const dot = (a: Point, b: Point) => a[0] * b[0] + a[1] * b[1] + a[2] * b[2];
const minus = (a: Point, b: Point): Point => [a[0] - b[0], a[1] - b[1], a[2] - b[2]];
const length = (a: Point) => Math.sqrt(dot(a, a));

/** Least distance of two segments: of the lines where both feet lie within, else of an end from the other segment. */
export function plainSegmentDistance(a: Point, b: Point, c: Point, d: Point): number {
  const u = minus(b, a);
  const v = minus(d, c);
  const w = minus(a, c);
  const fromPoint = (x: Point, from: Point, along: Point) => {
    const t = Math.min(1, Math.max(0, dot(minus(x, from), along) / Math.max(dot(along, along), 1e-300)));
    return length(minus(x, [from[0] + t * along[0], from[1] + t * along[1], from[2] + t * along[2]]));
  };
  let least = Math.min(fromPoint(a, c, v), fromPoint(b, c, v), fromPoint(c, a, u), fromPoint(d, a, u));
  const across = dot(u, u) * dot(v, v) - dot(u, v) * dot(u, v);
  if (across > 1e-12 * dot(u, u) * dot(v, v)) {
    const s = (dot(u, v) * dot(v, w) - dot(v, v) * dot(u, w)) / across;
    const t = (dot(u, u) * dot(v, w) - dot(u, v) * dot(u, w)) / across;
    if (s >= 0 && s <= 1 && t >= 0 && t <= 1) {
      least = Math.min(
        least,
        length([w[0] + s * u[0] - t * v[0], w[1] + s * u[1] - t * v[1], w[2] + s * u[2] - t * v[2]]),
      );
    }
  }
  return least;
}

/** Radius of the least ball outside which two tubes at an angle are apart, by halving. */
function plainBall(a: number, b: number, angle: number): number {
  const apart = (rho: number) => Math.asin(Math.min(1, a / rho)) + Math.asin(Math.min(1, b / rho)) <= angle;
  let low = Math.max(a, b);
  if (apart(low)) return low;
  let high = 2 * low;
  while (!apart(high)) {
    high *= 2;
    if (high > 1e6 * low) return Infinity;
  }
  for (let k = 0; k < 60; k++) {
    const mid = 0.5 * (low + high);
    if (apart(mid)) high = mid;
    else low = mid;
  }
  return high;
}

export interface JudgeOptions {
  /** Radii in place of today's: reserves, say; (rows). */
  readonly radius?: Float64Array;
  /** Places on each tube whose depth is looked at. */
  readonly samples?: number;
}

/** Everything about a forest that does not fit, in sentences; none where all is well. */
export function judgeForest(room: Room, options: JudgeOptions = {}): string[] {
  const { builder, tissue, limits } = room;
  const plain = plainForest(builder);
  const radius = options.radius ?? plain.radius;
  const samples = options.samples ?? 12;
  const faults: string[] = [];
  const at = (node: number): Point => [
    builder.position[3 * node]!,
    builder.position[3 * node + 1]!,
    builder.position[3 * node + 2]!,
  ];
  const { rows } = plain;
  const tops = rows.map((row) => builder.parent[row]!);
  const ends = rows.map((row) => [at(builder.parent[row]!), at(row)] as const);

  for (let i = 0; i < rows.length; i++) {
    const row = rows[i]!;
    const r = radius[row]!;
    for (const [what, told, is] of [
      ['load', builder.load[row]!, plain.load[row]!],
      ['weight', builder.weight[row]!, plain.weight[row]!],
    ] as const) {
      if (!(Math.abs(told - is) <= 1e-9 * is)) faults.push(`row ${row}: ${what} ${told}, from the terminals ${is}`);
    }
    for (let j = 0; j < i; j++) {
      const other = rows[j]!;
      if (tops[i] === tops[j] || tops[i] === other || tops[j] === row) continue;
      const need = r + radius[other]! + limits.gap;
      const [a, b] = ends[i]!;
      const [c, d] = ends[j]!;
      // Boxes first: most pairs are far apart.
      let far = false;
      for (let k = 0; k < 3 && !far; k++) {
        far =
          Math.min(a[k]!, b[k]!) - Math.max(c[k]!, d[k]!) > need ||
          Math.min(c[k]!, d[k]!) - Math.max(a[k]!, b[k]!) > need;
      }
      if (far) continue;
      const distance = plainSegmentDistance(a, b, c, d);
      if (distance < need * (1 - 1e-9)) faults.push(`rows ${row} and ${other}: ${distance} apart, need ${need}`);
    }
    if (!room.exempt.has(row)) {
      const [a, b] = ends[i]!;
      for (let k = 0; k <= samples; k++) {
        const t = k / samples;
        const depth = tissue.depth(a[0] + t * (b[0] - a[0]), a[1] + t * (b[1] - a[1]), a[2] + t * (b[2] - a[2]));
        // What marching along a tube may be off by, see `tubeInside`.
        if (depth < r * (1 - 1e-3)) faults.push(`row ${row}: depth ${depth} at ${t} of its length, radius ${r}`);
      }
    }
  }

  const ball = new Map<number, number>();
  const nodes = [...new Set([...rows, ...tops])];
  for (const node of nodes) {
    const children = [builder.child[2 * node]!, builder.child[2 * node + 1]!].filter((child) => child >= 0);
    for (const child of children)
      if (builder.parent[child] !== node) faults.push(`row ${child} is no child of ${node}`);
    const arms = children.map((child) => ({ r: radius[child]!, way: minus(at(child), at(node)) }));
    const up = builder.parent[node]!;
    if (up >= 0) arms.push({ r: radius[node]!, way: minus(at(up), at(node)) });
    let reach = arms.length === 1 ? RUN_OUT * arms[0]!.r : 0;
    for (let i = 0; i < arms.length; i++) {
      for (let j = 0; j < i; j++) {
        const one = arms[i]!;
        const two = arms[j]!;
        const cosine = dot(one.way, two.way) / (length(one.way) * length(two.way));
        const most = arms.length === 2 ? limits.cosMinBend : limits.cosMinAngle;
        if (!(cosine <= most + 1e-9)) faults.push(`node ${node}: cosine ${cosine} between two tubes, at most ${most}`);
        reach = Math.max(reach, plainBall(one.r, two.r, Math.acos(Math.min(1, Math.max(-1, cosine)))));
      }
    }
    ball.set(node, reach);
  }
  rows.forEach((row, i) => {
    const least = FIT_MARGIN * (ball.get(row)! + ball.get(tops[i]!)!);
    if (plain.length[row]! < least * (1 - 1e-7)) {
      faults.push(`row ${row}: ${plain.length[row]} long, its balls need ${least}`);
    }
  });
  return faults;
}
