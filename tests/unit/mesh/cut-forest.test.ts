import { describe, expect, it } from 'vitest';
import { InputError } from '../../../src/core/errors.ts';
import { solveFlow } from '../../../src/flow/solve.ts';
import { buildLumen } from '../../../src/mesh/build-lumen.ts';
import { cutField, cutForest, cutResistances } from '../../../src/mesh/cut-forest.ts';
import type { Forest } from '../../../src/tree/forest.ts';
import { strahlerOrders } from '../../../src/tree/strahler.ts';
import { tubeLength, vesselOfRow } from '../../../src/tree/vessels.ts';
import { randomSketch, type Sketch, sketchForest } from '../../support/lumen-forests.ts';

const VISCOSITY = 3.5e-3;

function solve(forest: Forest) {
  return solveFlow(forest, ['supply'], { rootPressures: [8000], viscosity: VISCOSITY, density: 1060 });
}

/** Trunk of 1 mm, daughters of 0.8 and 0.5 mm, the first with two of 0.6 mm, the second with two of 0.3 mm. */
const SKETCH: Sketch = [
  [-1, 0, 0, 0, 1e-3],
  [0, 10e-3, 0, 0, 1e-3],
  [1, 20e-3, 6e-3, 0, 0.8e-3],
  [1, 16e-3, -8e-3, 0, 0.5e-3],
  [2, 28e-3, 12e-3, 0, 0.6e-3],
  [2, 28e-3, 4e-3, 0, 0.6e-3],
  [3, 22e-3, -10e-3, 0, 0.3e-3],
  [3, 16e-3, -14e-3, 0, 0.3e-3],
];

describe('cutForest', () => {
  it('keeps everything where nothing is too fine', () => {
    const forest = sketchForest(SKETCH);
    const cut = cutForest(forest, { keepAbove: 0.3e-3 });
    expect(cut.forest).toEqual(forest);
    expect(cut.cuts).toEqual([]);
    expect(cut.removed).toBe(0);
    expect([...cutResistances(cut, solve(forest), solve(cut.forest))]).toEqual(new Array(forest.count).fill(0));
  });

  it('cuts whole vessels and keeps sisters of what stays, so that flow is conserved', () => {
    const forest = sketchForest(SKETCH);
    const cut = cutForest(forest, { keepAbove: 0.55e-3 });
    // 0.5 mm stays beside its sister of 0.8 mm; its daughters go.
    expect(cut.removed).toBe(2);
    expect(cut.cuts).toHaveLength(1);
    const [end] = cut.cuts as [number];
    expect(cut.forest.radius[end]).toBe(0.5e-3);
    const row = cut.source[end]!;
    expect(forest.radius[row]).toBe(0.5e-3);
    expect(cut.vesselNumbers[end]).toBe(vesselOfRow(forest, row));
    let out = 0;
    const children = new Set(cut.forest.parent);
    for (let i = 0; i < cut.forest.count; i++) if (!children.has(i)) out += cut.forest.flow[i]!;
    expect(out).toBeCloseTo(forest.flow[0]!, 20);
  });

  it('stands in for what it cut by its resistance', () => {
    const forest = sketchForest(SKETCH);
    const whole = solve(forest);
    const cut = cutForest(forest, { keepAbove: 0.55e-3 });
    const left = cutField(cut, whole);
    const again = solve(cut.forest);
    left.pressure.forEach((p, i) => {
      expect(p).toBeCloseTo(again.pressure[i]!, 9);
    });
    const [end] = cut.cuts as [number];
    const resistance = cutResistances(cut, whole, left)[end]!;
    // Two equal flows through tubes of 0.3 mm side by side: Σ Qᵢ² Rᵢ / Q², Rᵢ = 8 μ Lᵢ / (π r⁴), from the cap on.
    const row = cut.source[end]!;
    let power = 0;
    for (let i = 0; i < forest.count; i++) {
      if (forest.parent[i] !== row) continue;
      power += forest.flow[i]! ** 2 * ((8 * VISCOSITY * tubeLength(forest, i)) / (Math.PI * 0.3e-3 ** 4));
    }
    const extra =
      ((cut.drawn[end]! - 1) * 8 * VISCOSITY * tubeLength(forest, row)) / (Math.PI * forest.radius[row]! ** 4);
    expect(resistance / (power / forest.flow[row]! ** 2 - extra)).toBeCloseTo(1, 9);
  });

  it('cuts by order', () => {
    const forest = sketchForest(randomSketch('order', { vessels: 60 }));
    const cut = cutForest(forest, { keepOrder: 2 });
    const order = strahlerOrders(forest);
    for (const end of cut.cuts) {
      const row = cut.source[end]!;
      for (let i = 0; i < forest.count; i++) if (forest.parent[i] === row) expect(order[i]).toBe(1);
    }
    expect(cut.removed).toBeGreaterThan(0);
  });

  it('leaves a forest that meshes, with a straight run before every new cap', () => {
    for (const seed of ['p', 'q', 'r']) {
      const forest = sketchForest(randomSketch(seed, { vessels: 60, leastRatio: 0.4 }));
      const cut = cutForest(forest, { keepOrder: 2 });
      const mesh = buildLumen(cut.forest, { around: 12, vesselNumbers: cut.vesselNumbers });
      const undrawn = new Set(cut.cuts.filter((row) => cut.drawn[row] === 1));
      expect(mesh.problems.filter((problem) => !undrawn.has(problem.row))).toEqual([]);
      const caps = mesh.patches.filter((patch) => patch.kind === 'outlet');
      expect(caps.every((patch) => patch.name === `outlet_${cut.vesselNumbers[patch.row]}`)).toBe(true);
    }
  });

  it('refuses to leave nothing', () => {
    const forest = sketchForest(SKETCH);
    expect(() => cutForest(forest, { keepAbove: 2e-3 })).toThrow(InputError);
    expect(() => cutForest(forest, { keepOrder: 9 })).toThrow(/keepOrder: tree 0 begins with a vessel of radius/);
    expect(() => cutForest(forest, { keepOrder: 0 })).toThrow(/got 0/);
    expect(() => cutForest(forest, { keepAbove: -1 })).toThrow(/got -1 m/);
  });
});
