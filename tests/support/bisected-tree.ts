import { randomStream } from '../../src/core/random.ts';
import { specFromValue } from '../../src/spec/parse.ts';
import type { Spec } from '../../src/spec/types.ts';
import type { Forest } from '../../src/tree/forest.ts';
import type { LooseRows } from '../../src/tree/freeze.ts';

/** Edges of the box that is filled, mm. */
const EDGES = [30, 22, 18] as const;
/** How far a node may lie from the middle of its part, in parts of its width. */
const JITTER = 0.1;

/** A tree of any size that was never grown, and the spec that it fulfils. */
export interface BisectedTree {
  readonly forest: Forest;
  readonly spec: Spec;
}

/**
 * A space-filling binary tree in a box, made by cutting the box in two again and again; seeded, under 1 µs a vessel. The
 * tissue of its spec is the ellipsoid round the box.
 *
 * Why no two vessels touch: a part is cut square to the axes in turn, through its node. A node keeps its parent's
 * coordinate along the axis of its own cut, so the vessel to it lies in the plane that parts its children, and all
 * beyond lies to one side or the other. Only thickness could make them touch: radii follow the cube law from equal
 * terminals, and the trunk's is a small part of the terminals' spacing.
 *
 * @param terminals ≥ 2, exactly so many; 2 · terminals − 1 vessels
 */
export function bisectBox(terminals: number, seed = 'scale'): BisectedTree {
  const n = 2 * terminals;
  const random = randomStream(seed, 'bisection');
  const parent = new Int32Array(n);
  const position = new Float64Array(3 * n);
  const radius = new Float64Array(n);
  const flow = new Float64Array(n);
  const spacing = Math.cbrt((EDGES[0] * EDGES[1] * EDGES[2] * 1e-9) / terminals);
  const inletRadius_um = Number((spacing * 8e4).toPrecision(6));
  const spec = specFromValue({
    name: 'bisected box',
    seed,
    tissue: { shape: 'ellipsoid', center_mm: [0, 0, 0], radii_mm: EDGES.map((edge) => 0.88 * edge) },
    trees: [
      {
        name: 'supply',
        inlet: { position_mm: [0, 0, -0.5 * EDGES[2]], pressure_mmHg: 60, flow_mL_min: 1 },
        terminals: { count: terminals },
      },
    ],
    sizing: { rule: 'junction-exponent', junction_exponent: 3, inlet_radius_um: inletRadius_um },
    clearance: { gap_um: 0 },
    junctions: { min_angle_deg: 15 },
    refine: 'none',
  });
  const inletFlow = spec.trees[0]!.inlet.flow;
  const inletRadius = inletRadius_um * 1e-6;

  // One frame a level: low corner, high corner of the part, in edges.
  const frame = new Float64Array(6 * 128);
  frame.set([-0.5, -0.5, -0.5, 0.5, 0.5, 0.5]);
  position.set([0, 0, -0.5]);
  parent[0] = -1;
  let rows = 1;
  const grow = (level: number, above: number, count: number, axis: number): void => {
    const row = rows++;
    const box = 6 * level;
    parent[row] = above;
    flow[row] = (inletFlow * count) / terminals;
    radius[row] = inletRadius * Math.cbrt(count / terminals);
    for (let k = 0; k < 3; k++) {
      const low = frame[box + k]!;
      const high = frame[box + 3 + k]!;
      position[3 * row + k] =
        k === axis ? position[3 * above + k]! : low + (0.5 + JITTER * (2 * random.next() - 1)) * (high - low);
    }
    if (count === 1) return;
    const next = box + 6;
    const cut = position[3 * row + axis]!;
    const share = (cut - frame[box + axis]!) / (frame[box + 3 + axis]! - frame[box + axis]!);
    const first = Math.min(count - 1, Math.max(1, Math.round(count * share)));
    for (const high of [false, true]) {
      for (let k = 0; k < 6; k++) frame[next + k] = frame[box + k]!;
      frame[next + axis + (high ? 0 : 3)] = cut;
      grow(level + 1, row, high ? count - first : first, (axis + 1) % 3);
    }
  };
  grow(0, 0, terminals, 0);
  for (let i = 0; i < n; i++) for (let k = 0; k < 3; k++) position[3 * i + k]! *= EDGES[k]! * 1e-3;
  radius[0] = radius[1]!;
  flow[0] = flow[1]!;
  const forest = { count: n, treeStart: Int32Array.of(0, n), tree: new Int32Array(n), parent, position, radius, flow };
  return { forest, spec };
}

/** The rows of a forest in any order, as a builder keeps them after growth. */
export function shuffleRows(forest: Forest, seed = 'scale'): LooseRows {
  const n = forest.count;
  const random = randomStream(seed, 'shuffle');
  const place = new Int32Array(n);
  for (let i = 0; i < n; i++) place[i] = i;
  for (let i = n - 1; i > 0; i--) {
    const j = Math.floor(random.next() * (i + 1));
    const swap = place[i]!;
    place[i] = place[j]!;
    place[j] = swap;
  }
  const parent = new Int32Array(n);
  const position = new Float64Array(3 * n);
  const radius = new Float64Array(n);
  const flow = new Float64Array(n);
  const roots: number[] = [];
  for (let i = 0; i < n; i++) {
    const at = place[i]!;
    const above = forest.parent[i]!;
    parent[at] = above < 0 ? -1 : place[above]!;
    if (above < 0) roots.push(at);
    for (let k = 0; k < 3; k++) position[3 * at + k] = forest.position[3 * i + k]!;
    radius[at] = forest.radius[i]!;
    flow[at] = forest.flow[i]!;
  }
  return { count: n, parent, position, radius, flow, roots };
}
