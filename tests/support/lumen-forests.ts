import { type Random, randomStream } from '../../src/core/random.ts';
import { squaredDistanceBetweenSegments } from '../../src/core/segments.ts';
import type { Forest } from '../../src/tree/forest.ts';
import { freezeForest } from '../../src/tree/freeze.ts';

/** A node of a small hand-made tree: parent index (−1 for the root), place in m, radius of the tube to it in m. */
export type Sketch = readonly (readonly [parent: number, x: number, y: number, z: number, radius: number])[];

/** Forest of sketched trees; every terminal carries 1e-9 m³/s. */
export function sketchForest(...trees: readonly Sketch[]): Forest {
  const parent: number[] = [];
  const position: number[] = [];
  const radius: number[] = [];
  const roots: number[] = [];
  for (const tree of trees) {
    const base = parent.length;
    roots.push(base);
    for (const [p, x, y, z, r] of tree) {
      parent.push(p < 0 ? -1 : base + p);
      position.push(x, y, z);
      radius.push(r);
    }
  }
  const n = parent.length;
  const flow = new Array<number>(n).fill(0);
  const leaf = new Array<boolean>(n).fill(true);
  for (const p of parent) if (p >= 0) leaf[p] = false;
  // Sketches list parents before children.
  for (let i = n - 1; i >= 0; i--) {
    if (leaf[i]) flow[i] = 1e-9;
    if (parent[i]! >= 0) flow[parent[i]!]! += flow[i]!;
  }
  return freezeForest({ count: n, parent, position, radius, flow, roots }).forest;
}

const DEGREE = Math.PI / 180;

/** The rule for vessels that share a node, written out again: least ball radius of two tubes at an angle. */
export function ballRadius(a: number, b: number, cosine: number): number {
  const wide = Math.max(a, b);
  if (-cosine * wide >= Math.min(a, b)) return wide;
  return Math.sqrt((a * a + b * b + 2 * a * b * cosine) / (1 - cosine * cosine));
}

/** A straight vessel of radius r and length l along x. */
export const straightSketch = (r: number, l: number): Sketch => [
  [-1, 0, 0, 0, r],
  [0, l, 0, 0, r],
];

/**
 * A trunk of radius 1 along x and two daughters in the x–y plane, at angles from the trunk's way, as short as the rule
 * allows, in units of `scale` m.
 */
export function forkSketch(up: number, down: number, r1: number, r2: number, scale = 1e-3): Sketch {
  const c1 = Math.cos(up * DEGREE);
  const s1 = Math.sin(up * DEGREE);
  const c2 = Math.cos(down * DEGREE);
  const s2 = Math.sin(down * DEGREE);
  const ball = Math.max(ballRadius(1, r1, -c1), ballRadius(1, r2, -c2), ballRadius(r1, r2, c1 * c2 - s1 * s2));
  const l0 = 1.15 * (ball + 2);
  const l1 = 1.15 * (ball + 2 * r1);
  const l2 = 1.15 * (ball + 2 * r2);
  return [
    [-1, -l0 * scale, 0, 0, scale],
    [0, 0, 0, 0, scale],
    [1, l1 * c1 * scale, l1 * s1 * scale, 0, r1 * scale],
    [1, l2 * c2 * scale, -l2 * s2 * scale, 0, r2 * scale],
  ];
}

/** Two tubes of radius 1 with an angle between the axes that leave the bend. */
export function bendSketch(angle: number, scale = 1e-3): Sketch {
  const ball = ballRadius(1, 1, Math.cos(angle * DEGREE));
  const l = 1.15 * (ball + 2) * scale;
  return [
    [-1, -l, 0, 0, scale],
    [0, 0, 0, 0, scale],
    [1, -l * Math.cos(angle * DEGREE), l * Math.sin(angle * DEGREE), 0, scale],
  ];
}

interface Draft {
  /** Length of the tube to here, and the least it may have should it end here; in m. */
  length: number;
  least: number;
  parent: number;
  position: [number, number, number];
  radius: number;
}

export interface RandomForestOptions {
  readonly vessels: number;
  /** Least angle between vessels of a node, degrees. */
  readonly leastAngle?: number;
  /** Least radius of a daughter over its parent's; the thinnest side branch. */
  readonly leastRatio?: number;
  /** Vessel lengths over the least allowed: drawn from 1 to this. */
  readonly roomiest?: number;
  /** Chance that a node is a bend. */
  readonly bends?: number;
  /** Chance that a node with two daughters gets a third. */
  readonly triples?: number;
  readonly radius?: number;
}

/**
 * A random tree whose vessels are as long as the mesh asks for (often exactly so), whose angles are random from the
 * least up, and whose vessels do not touch.
 */
export function randomSketch(seed: string, options: RandomForestOptions): Sketch {
  const random = randomStream(seed, 'lumen-forest');
  const least = Math.cos((options.leastAngle ?? 25) * DEGREE);
  const leastRatio = options.leastRatio ?? 0.3;
  const roomiest = options.roomiest ?? 1.5;
  const scale = options.radius ?? 1e-3;
  const nodes: Draft[] = [{ parent: -1, position: [0, 0, 0], radius: scale, least: 0, length: 0 }];
  interface Open {
    at: number;
    direction: [number, number, number];
    /** Daughters to be: directions and radii, and the ball they need. */
    plan: Plan;
  }
  interface Plan {
    directions: [number, number, number][];
    radii: number[];
    ball: number;
  }
  const planNode = (back: [number, number, number], r: number, ends: boolean): Plan => {
    if (ends) return { directions: [], radii: [], ball: 2 * r };
    const kind = random.next();
    const bends = options.bends ?? 0.15;
    const triples = options.triples ?? 0.1;
    const count = kind < bends ? 1 : random.next() < triples ? 3 : 2;
    const directions: [number, number, number][] = [];
    const radii: number[] = [];
    for (let k = 0; k < count; k++) {
      for (let tries = 0; tries < 200; tries++) {
        const d = randomDirection(random);
        if (dot(d, back) > least || directions.some((e) => dot(d, e) > least)) continue;
        directions.push(d);
        // The first daughter goes on nearly as wide as its parent or splits evenly with the second.
        const ratio = count === 1 ? 1 : leastRatio + (1 - leastRatio) * random.next();
        radii.push(r * ratio);
        break;
      }
    }
    let ball = r;
    for (let i = 0; i < directions.length; i++) {
      ball = Math.max(ball, ballRadius(r, radii[i]!, dot(back, directions[i]!)));
      for (let j = 0; j < i; j++)
        ball = Math.max(ball, ballRadius(radii[i]!, radii[j]!, dot(directions[i]!, directions[j]!)));
    }
    return { directions, radii, ball };
  };
  const place = (
    from: number,
    ballHere: number,
    d: [number, number, number],
    r: number,
    ends: boolean,
  ): Open | null => {
    const back: [number, number, number] = [-d[0], -d[1], -d[2]];
    const plan = planNode(back, r, ends);
    const roomy = random.next() < 0.5 ? 1 : 1 + (roomiest - 1) * random.next();
    const length = 1.15 * (ballHere + plan.ball) * roomy;
    const p = nodes[from]!.position;
    const q: [number, number, number] = [p[0] + length * d[0], p[1] + length * d[1], p[2] + length * d[2]];
    // Room for the junction's ball too, so that what follows has a chance.
    for (let i = 1; i < nodes.length; i++) {
      const node = nodes[i]!;
      if (i === from || node.parent === from) continue;
      const o = nodes[node.parent]!.position;
      const square = squaredDistanceBetweenSegments(...p, ...q, ...o, ...node.position);
      const gap = 1.3 * (r + node.radius);
      if (square < gap * gap) return null;
    }
    nodes.push({ parent: from, position: q, radius: r, length, least: 1.15 * (ballHere + 2 * r) });
    return { at: nodes.length - 1, direction: d, plan };
  };
  const queue: Open[] = [];
  const first = place(0, 2 * scale, randomDirection(random), scale, options.vessels < 2);
  if (first !== null) queue.push(first);
  while (queue.length > 0) {
    const open = queue.shift()!;
    for (let k = 0; k < open.plan.directions.length; k++) {
      const ends = nodes.length + queue.length >= options.vessels;
      for (let tries = 0; tries < 6; tries++) {
        const next = place(open.at, open.plan.ball, open.plan.directions[k]!, open.plan.radii[k]!, ends || tries > 3);
        if (next === null) continue;
        queue.push(next);
        break;
      }
    }
  }
  return withoutStumps(nodes);
}

/** Drops vessels whose daughters found no place and which are then too short to end in a cap. */
function withoutStumps(nodes: readonly Draft[]): Sketch {
  const keep = nodes.map(() => true);
  const daughters = nodes.map(() => 0);
  for (const node of nodes) if (node.parent >= 0) daughters[node.parent]!++;
  for (let i = nodes.length - 1; i > 0; i--) {
    const node = nodes[i]!;
    if (daughters[i]! > 0 || node.length >= node.least * (1 - 1e-12)) continue;
    keep[i] = false;
    daughters[node.parent]!--;
  }
  const place: number[] = [];
  let next = 0;
  for (let i = 0; i < nodes.length; i++) place[i] = keep[i] ? next++ : -1;
  return nodes
    .filter((_, i) => keep[i])
    .map((node) => [node.parent < 0 ? -1 : place[node.parent]!, ...node.position, node.radius] as const);
}

/** A chain of close junctions, each vessel exactly as long as the rule asks, side branches turning round the trunk. */
export function chainSketch(links: number, angle: number, ratio: number, scale = 1e-3): Sketch {
  const c = Math.cos(angle * DEGREE);
  const s = Math.sin(angle * DEGREE);
  const ball = Math.max(ballRadius(1, ratio, -c), ballRadius(1, ratio, c), 1);
  const rows: [number, number, number, number, number][] = [[-1, 0, 0, 0, scale]];
  let x = 1.15 * (ball + 2);
  rows.push([0, x * scale, 0, 0, scale]);
  let at = 1;
  for (let k = 0; k < links; k++) {
    const turn = 2.4 * k;
    const l = 1.15 * (ball + 2 * ratio);
    rows.push([at, (x + l * c) * scale, l * s * Math.cos(turn) * scale, l * s * Math.sin(turn) * scale, ratio * scale]);
    x += 1.15 * (k === links - 1 ? ball + 2 : 2 * ball);
    rows.push([at, x * scale, 0, 0, scale]);
    at = rows.length - 1;
  }
  return rows;
}

function randomDirection(random: Random): [number, number, number] {
  const z = 2 * random.next() - 1;
  const turn = 2 * Math.PI * random.next();
  const r = Math.sqrt(1 - z * z);
  return [r * Math.cos(turn), r * Math.sin(turn), z];
}

function dot(a: readonly [number, number, number], b: readonly [number, number, number]): number {
  return a[0] * b[0] + a[1] * b[1] + a[2] * b[2];
}
