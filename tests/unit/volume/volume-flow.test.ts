import { describe, expect, it } from 'vitest';
import { buildLumen } from '../../../src/mesh/build-lumen.ts';
import type { FlowField, Forest, TreeKind } from '../../../src/tree/forest.ts';
import { buildVolume } from '../../../src/volume/build-volume.ts';
import type { LumenVolume } from '../../../src/volume/lumen-volume.ts';
import { solveVolumeFlow, type VolumeFlow } from '../../../src/volume/volume-flow.ts';
import { forkSketch, type Sketch, sketchForest, straightSketch } from '../../support/lumen-forests.ts';
import { fluxAcross } from '../../support/volume-flux.ts';

interface Filled {
  readonly forest: Forest;
  readonly mesh: LumenVolume;
  readonly flow: VolumeFlow;
}

function fill(sketch: Sketch, around: number, layers: number, kinds: readonly TreeKind[] = ['supply']): Filled {
  const forest = sketchForest(sketch);
  const mesh = buildVolume(buildLumen(forest, { around, kinds }), forest, { layers });
  const pressure = Float64Array.from({ length: forest.count }, (_, row) => 9000 - 1000 * row);
  const field = { forest, pressure } satisfies Pick<FlowField, 'forest' | 'pressure'>;
  return { forest, mesh, flow: solveVolumeFlow(mesh, forest, field, kinds) };
}

/** Flux over the vessel's flow at a share of the way along it. */
function fluxAt({ forest, mesh, flow }: Filled, row: number, share: number): number {
  const from = [0, 1, 2].map((k) => forest.position[3 * forest.parent[row]! + k]!);
  const way = [0, 1, 2].map((k) => forest.position[3 * row + k]! - from[k]!);
  const length = Math.hypot(...way);
  const place = from.map((x, k) => x + share * way[k]!) as [number, number, number];
  const normal = way.map((x) => x / length) as [number, number, number];
  return fluxAcross(mesh, flow, row - 1, place, normal, 2 * forest.radius[row]!) / forest.flow[row]!;
}

/** Flux out of the lumen through each patch, m³/s: linear over triangles, quadrilaterals cut in two. */
function patchFluxes({ mesh, flow }: Filled): number[] {
  const out = mesh.patches.map(() => 0);
  const add = (patch: number, corners: number[]): void => {
    const [a, b, c] = corners.map((v) => [0, 1, 2].map((k) => mesh.position[3 * v + k]!)) as [
      number[],
      number[],
      number[],
    ];
    const e = b.map((x, k) => x - a[k]!);
    const f = c.map((x, k) => x - a[k]!);
    const n = [e[1]! * f[2]! - e[2]! * f[1]!, e[2]! * f[0]! - e[0]! * f[2]!, e[0]! * f[1]! - e[1]! * f[0]!];
    for (const v of corners) for (let k = 0; k < 3; k++) out[patch]! += (n[k]! * flow.velocity[3 * v + k]!) / 6;
  };
  mesh.patchOfTriangle.forEach((patch, t) => {
    add(patch, [...mesh.triangle.subarray(3 * t, 3 * t + 3)]);
  });
  mesh.patchOfQuad.forEach((patch, q) => {
    const [a, b, c, d] = mesh.quad.subarray(4 * q, 4 * q + 4) as unknown as [number, number, number, number];
    add(patch, [a, b, c]);
    add(patch, [a, c, d]);
  });
  return out;
}

describe('solveVolumeFlow', () => {
  it('draws the parabola of Hagen and Poiseuille in a straight vessel', () => {
    const r = 1e-3;
    const filled = fill(straightSketch(r, 8e-3), 24, 3);
    const { forest, mesh, flow } = filled;
    const mean = forest.flow[1]! / (Math.PI * r * r);
    let worst = 0;
    for (let v = 0; v < mesh.row.length; v++) {
      const rho = Math.hypot(mesh.position[3 * v + 1]!, mesh.position[3 * v + 2]!);
      worst = Math.max(worst, Math.abs(flow.velocity[3 * v]! / mean - 2 * Math.max(0, 1 - (rho * rho) / (r * r))));
      expect(flow.velocity[3 * v + 1]).toBeCloseTo(0, 12);
    }
    // Corners of rings lie 0.57 % outside the circle, whose area their polygon has: 2 · 2 · 0.0057.
    expect(worst).toBeLessThan(0.03);
    for (let t = 0.03; t < 1; t += 0.031) expect(Math.abs(fluxAt(filled, 1, t) - 1)).toBeLessThan(0.003);
    // 9000 Pa at the inlet, 8000 Pa at the outlet.
    for (let v = 0; v < mesh.row.length; v++)
      expect(flow.pressure[v]).toBeCloseTo(9000 - (1000 * mesh.position[3 * v]!) / 8e-3, 6);
  });

  it.each([
    ['supply', 0],
    ['supply', 3],
    ['drain', 3],
  ] as const)('carries the flow through every cap and section of a fork: %s, %d layers', (kind, layers) => {
    const filled = fill(forkSketch(40, 35, 0.8, 0.7), 24, layers, [kind]);
    const { forest, mesh, flow } = filled;
    const fluxes = patchFluxes(filled);
    const way = kind === 'supply' ? 1 : -1;
    mesh.patches.forEach((patch, i) => {
      if (patch.row < 0) expect(fluxes[i]! / forest.flow[0]!).toBeCloseTo(0, 12);
      else expect(fluxes[i]! / ((patch.row === 0 ? -way : way) * forest.flow[patch.row]!)).toBeCloseTo(1, 9);
    });
    // At rest on the wall, and only there.
    expect(flow.velocity.subarray(0, 3 * mesh.wallPoints).every((u) => u === 0)).toBe(true);
    expect(flow.velocity.every(Number.isFinite)).toBe(true);
    for (const row of [1, 2, 3]) {
      const plain = row === 1 ? [0.11, 0.29, 0.41] : [0.63, 0.77, 0.91];
      for (const t of plain) expect(Math.abs(way * fluxAt(filled, row, t) - 1), `${row} ${t}`).toBeLessThan(0.005);
    }
    expect(flow.divergence).toBeLessThan(1e-4);
  });

  it('keeps the flow across a node whose daughters are unequal', () => {
    const filled = fill(forkSketch(10, 65, 0.95, 0.3), 16, 2);
    // What goes in comes out of any plane across the trunk that no daughter reaches, well into the node.
    for (const t of [0.5, 0.6, 0.7, 0.8]) expect(Math.abs(fluxAt(filled, 1, t) - 1)).toBeLessThan(0.012);
  });

  it('refuses the field of another forest', () => {
    const { forest, mesh } = fill(straightSketch(1e-3, 8e-3), 8, 1);
    const field = { forest: { ...forest }, pressure: new Float64Array(2) };
    expect(() => solveVolumeFlow(mesh, forest, field, ['supply'])).toThrow('another forest');
  });
});
