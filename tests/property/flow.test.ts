import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { measureImbalance } from '../../src/flow/balance.ts';
import { solveWithEnds } from '../../src/flow/ends.ts';
import { measurePower } from '../../src/flow/power.ts';
import { solveFlow } from '../../src/flow/solve.ts';
import type { Forest } from '../../src/tree/forest.ts';
import { randomForest } from '../support/small-trees.ts';

const forests = fc
  .record({
    seed: fc.string({ maxLength: 8 }),
    terminals: fc.integer({ min: 1, max: 60 }),
    trees: fc.integer({ min: 1, max: 3 }),
  })
  .map(({ seed, terminals, trees }) => randomForest(seed, terminals, trees, 1.5));
const check = (property: fc.IProperty<[Forest]> | fc.IProperty<[Forest, number]>) =>
  fc.assert(property as fc.IProperty<[Forest]>, { seed: 20240517, numRuns: 100 });

const solve = (forest: Forest, viscosity = 0.0035) => {
  const trees = forest.treeStart.length - 1;
  // Roots at 0, so that pressures are drops and nothing is lost beside a level.
  return solveFlow(forest, new Array(trees).fill('supply'), {
    rootPressures: new Float64Array(trees),
    viscosity,
    density: 1060,
  });
};

const near = (got: number, want: number, tolerance = 1e-11) =>
  expect(Math.abs(got - want)).toBeLessThanOrEqual(tolerance * Math.abs(want));

describe('flow on any tree', () => {
  it('falls along the blood and balances', () => {
    check(
      fc.property(forests, (forest) => {
        const { pressure, transit } = solve(forest);
        for (let i = 0; i < forest.count; i++) {
          const parent = forest.parent[i]!;
          if (parent < 0) continue;
          expect(pressure[i]!).toBeLessThan(pressure[parent]!);
          expect(transit[i]!).toBeGreaterThan(transit[parent]!);
        }
        expect(measureImbalance(forest)).toBeLessThan(1e-12);
      }),
    );
  });

  it('scales: k times as large has k³ the volume and k⁻³ the drops', () => {
    check(
      fc.property(forests, fc.double({ min: 0.01, max: 100, noNaN: true }), (forest, k) => {
        const large: Forest = {
          ...forest,
          position: forest.position.map((x) => k * x),
          radius: forest.radius.map((r) => k * r),
        };
        near(measurePower(large, 0.0035, 1).volume, k * k * k * measurePower(forest, 0.0035, 1).volume);
        near(measurePower(large, 0.0035, 1).pumping, measurePower(forest, 0.0035, 1).pumping / (k * k * k));
        const [one, two] = [solve(forest), solve(large)];
        for (let i = 0; i < forest.count; i++) {
          near(two.pressure[i]!, one.pressure[i]! / (k * k * k));
          near(two.transit[i]!, one.transit[i]! * k * k * k);
        }
      }),
    );
  });

  it('is linear: twice the viscosity is twice the drop and the shear, half the Reynolds number', () => {
    check(
      fc.property(forests, (forest) => {
        const [one, two] = [solve(forest), solve(forest, 0.007)];
        for (let i = 0; i < forest.count; i++) {
          near(two.pressure[i]!, 2 * one.pressure[i]!);
          near(two.wallShear[i]!, 2 * one.wallShear[i]!);
          near(two.reynolds[i]!, one.reynolds[i]! / 2);
        }
      }),
    );
  });

  it('does not change when the tree is turned', () => {
    check(
      fc.property(forests, fc.double({ min: 0, max: 7, noNaN: true }), (forest, angle) => {
        const position = forest.position.slice();
        for (let i = 0; i < forest.count; i++) {
          const [x, y] = [position[3 * i]!, position[3 * i + 1]!];
          position[3 * i] = Math.cos(angle) * x - Math.sin(angle) * y;
          position[3 * i + 1] = Math.sin(angle) * x + Math.cos(angle) * y;
        }
        const [one, two] = [solve(forest), solve({ ...forest, position })];
        for (let i = 0; i < forest.count; i++) near(two.pressure[i]!, one.pressure[i]!, 1e-9);
      }),
    );
  });

  it('comes back from its own end pressures', () => {
    check(
      fc.property(forests, (forest) => {
        const trees = forest.treeStart.length - 1;
        const { flow, residual } = solveWithEnds(forest, new Float64Array(trees), solve(forest).pressure, 0.0035);
        expect(residual.balance).toBeLessThan(1e-12);
        for (let i = 0; i < forest.count; i++) near(flow[i]!, forest.flow[i]!, 1e-6);
      }),
    );
  });
});
