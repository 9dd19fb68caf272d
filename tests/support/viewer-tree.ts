import type { Rows } from '../../src/core/reals.ts';
import type { FlowField, Forest, TreeKind, TreeRecord } from '../../src/tree/forest.ts';
import { freezeForest } from '../../src/tree/freeze.ts';
import { strahlerOrders } from '../../src/tree/strahler.ts';

interface Plan {
  readonly name: string;
  readonly kind: TreeKind;
  /** m */
  readonly root: readonly [number, number, number];
  /** Along x. */
  readonly side: 1 | -1;
  /** Rounds of splitting; 2^levels terminals, 2^(levels + 1) − 1 vessels. */
  readonly levels: number;
}

const VISCOSITY = 3.5e-3;
const DENSITY = 1060;

/**
 * Trees that split in two with a fixed uneven share, for tests of the viewer: not grown, not free of touching, but with
 * a flow field that obeys Poiseuille's law. Same arguments, same tree.
 */
export function buildViewerTree(plans: readonly Plan[], solved = true): TreeRecord {
  const parent: number[] = [];
  const position: number[] = [];
  const radius: number[] = [];
  const flow: number[] = [];
  const roots: number[] = [];
  const add = (from: number, at: readonly number[], own: number) => {
    parent.push(from);
    position.push(...at);
    flow.push(own);
    // Cube law, 260 µm at 2e-8 m³/s.
    radius.push(2.6e-4 * Math.cbrt(own / 2e-8));
    return parent.length - 1;
  };
  for (const plan of plans) {
    roots.push(add(-1, plan.root, 2e-8));
    const grow = (from: number, angle: number, length: number, own: number, levels: number): void => {
      const base = position.slice(3 * from, 3 * from + 3) as [number, number, number];
      const twist = 2.4 * levels + from * 0.37;
      const across = Math.sin(angle) * length;
      const at = [
        base[0] + plan.side * Math.cos(angle) * length,
        base[1] + across * Math.cos(twist),
        base[2] + across * Math.sin(twist),
      ];
      const row = add(from, at, own);
      if (levels === 0) return;
      grow(row, 0.5 + 0.15 * (levels % 3), 0.86 * length, 0.62 * own, levels - 1);
      grow(row, 1.15, 0.8 * length, own - 0.62 * own, levels - 1);
    };
    grow(roots.at(-1)!, 0, 3e-3, 2e-8, plan.levels);
  }
  const { forest } = freezeForest({ count: parent.length, parent, position, radius, flow, roots });
  return {
    forest,
    kinds: plans.map(({ kind }) => kind),
    names: plans.map(({ name }) => name),
    field: solved ? solveField(forest, plans) : null,
    order: strahlerOrders(forest) as Rows,
    provenance: JSON.stringify({
      name: 'viewer test',
      tissue: { shape: 'box', min_mm: [0, -6.5, -2], max_mm: [16, 3.2, 4.7] },
      trees: plans.map(({ name, kind }) => ({ name, kind })),
    }),
  };
}

function solveField(forest: Forest, plans: readonly Plan[]): FlowField {
  const n = forest.count;
  const column = () => new Float64Array(n);
  const field = {
    pressure: column(),
    transit: column(),
    viscosity: column().fill(VISCOSITY),
    velocity: column(),
    wallShear: column(),
    reynolds: column(),
    haematocrit: column(),
  };
  for (let i = 0; i < n; i++) {
    const r = forest.radius[i]!;
    const q = forest.flow[i]!;
    field.velocity[i] = q / (Math.PI * r * r);
    field.wallShear[i] = (4 * VISCOSITY * q) / (Math.PI * r * r * r);
    field.reynolds[i] = (2 * DENSITY * q) / (Math.PI * r * VISCOSITY);
    const drains = plans[forest.tree[i]!]!.kind === 'drain';
    const p = forest.parent[i]!;
    if (p < 0) {
      field.pressure[i] = drains ? 700 : 8000;
      continue;
    }
    const at = forest.position;
    const length = Math.hypot(
      at[3 * i]! - at[3 * p]!,
      at[3 * i + 1]! - at[3 * p + 1]!,
      at[3 * i + 2]! - at[3 * p + 2]!,
    );
    const drop = (8 * VISCOSITY * length * q) / (Math.PI * r * r * r * r);
    field.pressure[i] = field.pressure[p]! + (drains ? drop : -drop);
    field.transit[i] = field.transit[p]! + length / field.velocity[i]!;
  }
  return { forest, ...field };
}

/** A supply and a drain tree that face each other in a box, 510 vessels. */
export function twoFacingTrees(solved = true): TreeRecord {
  return buildViewerTree(
    [
      { name: 'supply', kind: 'supply', root: [0, 0.8e-3, 0], side: 1, levels: 7 },
      { name: 'drain', kind: 'drain', root: [16e-3, -0.9e-3, 0.4e-3], side: -1, levels: 7 },
    ],
    solved,
  );
}
