import { describe, expect, it } from 'vitest';
import { randomStream } from '../../../src/core/random.ts';
import { measureImbalance } from '../../../src/flow/balance.ts';
import { solveWithEnds } from '../../../src/flow/ends.ts';
import { narrowTube, withFlow } from '../../../src/flow/narrow.ts';
import { solveFlow } from '../../../src/flow/solve.ts';
import { leastPowerRadius } from '../../../src/physics/murray.ts';
import { tubeResistance } from '../../../src/physics/poiseuille.ts';
import { listChildren } from '../../../src/tree/children.ts';
import { tubeLength } from '../../../src/tree/vessels.ts';
import { densePressures } from '../../support/dense-flow.ts';
import { forestOf, randomForest } from '../../support/small-trees.ts';

/** Length of a tube of radius 1 m and viscosity π/8 Pa·s: its resistance is its length. */
const PLAIN = Math.PI / 8;

describe('solveWithEnds', () => {
  // Source: Kirchhoff; R in series is ΣR, 1/R side by side Σ1/R. 1 + (2 ∥ 3) = 11/5, so 11 Pa drive 5 m³/s.
  it('solves tubes in series and side by side', () => {
    const forest = forestOf([
      [-1, 0, 0, 0, 1, 1],
      [0, 1, 0, 0, 1, 1],
      [1, 1, 2, 0, 1, 0.5],
      [1, 1, 0, 3, 1, 0.5],
    ]);
    const got = solveWithEnds(forest, [11], [0, 0, 0, 0], PLAIN);
    const want = { flow: [5, 5, 3, 2], pressure: [11, 6, 0, 0] };
    for (let i = 0; i < 4; i++) {
      expect(got.flow[i]).toBeCloseTo(want.flow[i]!, 12);
      expect(got.pressure[i]).toBeCloseTo(want.pressure[i]!, 12);
    }
    expect(got.reversed).toBe(0);
    expect(got.residual.balance).toBeLessThan(1e-15);
  });

  it('agrees with a dense solve where ends differ and conserves to 1e-12', () => {
    const random = randomStream('ends', 'test');
    let reversed = 0;
    for (let round = 0; round < 30; round++) {
      const wild = randomForest(`ends-${round}`, 1 + 2 * round, 2);
      const forest = randomForest(`ends-${round}`, 1 + 2 * round, 2, 1);
      const n = forest.count;
      const children = listChildren(forest);
      const terminal = (i: number) => children.start[i] === children.start[i + 1];
      const ends = Float64Array.from({ length: n }, (_, i) => (terminal(i) ? 1000 + 500 * random.next() : Number.NaN));
      const roots = [1600, 700];
      const got = solveWithEnds(forest, roots, ends, 0.0035);
      const resistance = Array.from({ length: n }, (_, i) =>
        tubeResistance(tubeLength(forest, i), forest.radius[i]!, 0.0035),
      );
      const fixed = Array.from({ length: n }, (_, i) => (forest.parent[i]! < 0 ? roots[forest.tree[i]!]! : ends[i]!));
      const want = densePressures(forest, resistance, fixed);
      for (let i = 0; i < n; i++) expect(Math.abs(got.pressure[i]! - want[i]!)).toBeLessThan(1e-9 * 1600);
      for (const [trees, solution] of [
        [forest, got],
        [wild, solveWithEnds(wild, roots, ends, 0.0035)],
      ] as const) {
        expect(measureImbalance(trees, solution.flow)).toBeLessThan(1e-12);
        expect(solution.residual.balance).toBeLessThan(1e-12);
        expect(solution.residual.pressure).toBeLessThan(1e-12);
      }
      reversed += got.reversed;
    }
    // Terminals at different pressures feed one another: the count must see it.
    expect(reversed).toBeGreaterThan(0);
  });

  it('gives back the flows of a solved tree from its end pressures', () => {
    // Radii as a real tree has them: with random ones the drops of thick tubes drown in the pressures themselves.
    const raw = randomForest('back', 200, 2);
    const forest = { ...raw, radius: Float64Array.from(raw.flow, (q) => leastPowerRadius(q, 0.0035, 600)) };
    const kinds = ['supply', 'drain'] as const;
    const field = solveFlow(forest, kinds, { rootPressures: [9000, 500], viscosity: 0.0035, density: 1060 });
    const got = solveWithEnds(forest, [9000, 500], field.pressure, 0.0035);
    expect(got.reversed).toBe(0);
    for (let i = 0; i < forest.count; i++) {
      expect(Math.abs(got.flow[i]!) / forest.flow[i]! - 1).toBeLessThan(1e-9);
      expect(Math.sign(got.flow[i]!)).toBe(forest.tree[i] === 0 ? 1 : -1);
    }
    const again = solveFlow(withFlow(forest, got.flow), kinds, {
      rootPressures: [9000, 500],
      viscosity: 0.0035,
      density: 1060,
    });
    for (let i = 0; i < forest.count; i++) expect(again.pressure[i]).toBeCloseTo(got.pressure[i]!, 6);
  });

  it('loses no digits where drops are small beside the pressures', () => {
    const forest = randomForest('high', 300);
    const ends = new Float64Array(forest.count).fill(1e9);
    const got = solveWithEnds(forest, [1e9 + 1e-3], ends, 0.0035);
    expect(got.residual.balance).toBeLessThan(1e-12);
    const plain = solveWithEnds(forest, [2 ** -10], new Float64Array(forest.count), 0.0035);
    for (let i = 0; i < forest.count; i++)
      expect(got.flow[i]! / plain.flow[i]!).toBeCloseTo((1e9 + 1e-3 - 1e9) * 1024, 9);
  });

  it('starves what lies behind a narrowed tube', () => {
    const forest = forestOf([
      [-1, 0, 0, 0, 1, 2],
      [0, 1, 0, 0, 1, 2],
      [1, 1, 1, 0, 1, 1],
      [1, 1, 0, 1, 1, 1],
    ]);
    const narrow = narrowTube(forest, 2, 0.5);
    expect(Array.from(narrow.radius)).toEqual([1, 1, 0.5, 1]);
    expect(Array.from(forest.radius)).toEqual([1, 1, 1, 1]);
    // Resistance 16-fold: the two sides share 16:1.
    const got = solveWithEnds(narrow, [1], new Float64Array(4), PLAIN);
    expect(got.flow[3]! / got.flow[2]!).toBeCloseTo(16, 12);
    expect(Array.from(narrowTube(forest, 1, 0.5).radius)).toEqual([0.5, 0.5, 1, 1]);
    expect(() => narrowTube(forest, 0, 0.5)).toThrow(/row 0/);
  });

  it('refuses ends without a pressure, and to store a flow that runs backwards', () => {
    const forest = randomForest('refuse', 5);
    expect(() => solveWithEnds(forest, [1], new Float64Array(forest.count).fill(Number.NaN), 1)).toThrow(
      /end pressure NaN/,
    );
    expect(() => solveWithEnds(forest, [1], [0], 1)).toThrow(/1 terminal pressures/);
    const flow = forest.flow.slice();
    flow[2]! *= -1;
    expect(() => withFlow(forest, flow)).toThrow(/row 2/);
  });
});

describe('measureImbalance', () => {
  it('sees a leak', () => {
    const forest = randomForest('leak', 10);
    expect(measureImbalance(forest)).toBeLessThan(1e-15);
    const flow = forest.flow.slice();
    flow[1]! *= 1 + 1e-6;
    expect(measureImbalance(forest, flow)).toBeGreaterThan(0.9e-6);
  });
});
