import { describe, expect, it } from 'vitest';
import { solveFlow } from '../../../src/flow/solve.ts';
import { boundaryTable } from '../../../src/mesh/boundary-table.ts';
import { buildLumen } from '../../../src/mesh/build-lumen.ts';
import { inletProfile } from '../../../src/mesh/inlet-profile.ts';
import { forkSketch, sketchForest } from '../../support/lumen-forests.ts';

const forest = sketchForest(forkSketch(40, 30, 0.8, 0.6));

describe.each([
  ['flat', 'supply'],
  ['parabolic', 'supply'],
  ['parabolic', 'drain'],
] as const)('a %s profile of a %s tree', (profile, kind) => {
  const kinds = [kind];
  const field = solveFlow(forest, kinds, { rootPressures: [8000], viscosity: 3.5e-3, density: 1060 });
  const mesh = buildLumen(forest, { around: 24, kinds });
  const boundary = boundaryTable(mesh, forest, field, 1060);
  const rows = inletProfile(mesh, boundary, profile);
  const inlets = boundary.filter(({ type }) => type === 'inlet');

  it('stands at the corners of every inlet, each once', () => {
    expect(inlets.length).toBe(kind === 'supply' ? 1 : 2);
    for (const { patch } of inlets) {
      const p = mesh.patches.findIndex(({ name }) => name === patch);
      const corners = new Set<string>();
      for (let t = 0; t < mesh.patch.length; t++) {
        if (mesh.patch[t] !== p) continue;
        for (let k = 0; k < 3; k++) {
          const v = mesh.triangle[3 * t + k]!;
          corners.add([0, 1, 2].map((i) => mesh.position[3 * v + i]).join());
        }
      }
      const told = rows.filter((row) => row.patch === patch).map(({ place }) => place.join());
      expect(told.length).toBe(corners.size);
      expect(new Set(told)).toEqual(corners);
    }
  });

  it('carries the flow of the table, and has the shape of developed flow', () => {
    for (const { patch, flow, normal, velocity, radius, centre } of inlets) {
      const p = mesh.patches.findIndex(({ name }) => name === patch);
      const at = new Map(rows.filter((row) => row.patch === patch).map((row) => [row.place.join(), row.velocity]));
      let sum = 0;
      for (let t = 0; t < mesh.patch.length; t++) {
        if (mesh.patch[t] !== p) continue;
        const corner = [0, 1, 2].map((k) => {
          const v = mesh.triangle[3 * t + k]!;
          return [0, 1, 2].map((i) => mesh.position[3 * v + i]!);
        });
        const [u, w] = [1, 2].map((k) => corner[k]!.map((x, i) => x - corner[0]![i]!));
        const area =
          0.5 *
          Math.hypot(
            u![1]! * w![2]! - u![2]! * w![1]!,
            u![2]! * w![0]! - u![0]! * w![2]!,
            u![0]! * w![1]! - u![1]! * w![0]!,
          );
        const inward = corner.map((x) => -at.get(x.join())!.reduce((s, v, i) => s + v * normal[i]!, 0));
        sum += (area * (inward[0]! + inward[1]! + inward[2]!)) / 3;
      }
      expect(sum / flow).toBeCloseTo(1, 12);
      for (const row of rows.filter((one) => one.patch === patch)) {
        const speed = Math.hypot(...row.velocity);
        const part = Math.hypot(...row.place.map((x, i) => x - centre[i]!)) / radius;
        // Hagen–Poiseuille: v = 2 v̄ (1 − ρ²/r²); any fluid-mechanics text, from memory. The rest is facets.
        const exact = profile === 'flat' ? velocity : 2 * velocity * (1 - part * part);
        expect(Math.abs(speed - exact) / velocity).toBeLessThan(0.08);
        if (profile === 'parabolic' && part > 0.99) expect(speed).toBe(0);
      }
    }
  });
});
