import { describe, expect, it } from 'vitest';
import { fromSi } from '../../../src/core/units.ts';
import { measurePower } from '../../../src/flow/power.ts';
import { solveFlow } from '../../../src/flow/solve.ts';
import { symmetricRatios } from '../../../src/physics/junction.ts';
import { tubeResistance } from '../../../src/physics/poiseuille.ts';
import { listChildren } from '../../../src/tree/children.ts';
import type { Forest } from '../../../src/tree/forest.ts';
import { tubeLength } from '../../../src/tree/vessels.ts';
import { densePressures } from '../../support/dense-flow.ts';
import { forestOf, type Row, randomForest } from '../../support/small-trees.ts';

const near = (got: number, want: number, tolerance = 1e-9) =>
  expect(Math.abs(got / want - 1), `${got} against ${want}`).toBeLessThan(tolerance);

/** Symmetric binary tree: ten generations, r0 = 1 mm, every length 20 radii, Q = 1e-6 m³/s. */
function symmetricTree(exponent: number): Forest {
  const ratio = symmetricRatios(exponent).radius;
  const rows: Row[] = [[-1, 0, 0, 0, 1e-3, 1e-6]];
  let before = [0];
  let radius = 1e-3;
  for (let generation = 0; generation < 10; generation++) {
    const now: number[] = [];
    for (const parent of before) {
      for (let child = 0; child < (generation === 0 ? 1 : 2); child++) {
        const [, x, y, z] = rows[parent]!;
        now.push(rows.length);
        // Each child along another axis, so that lengths are exact and nothing hangs on angles.
        const step = 20 * radius;
        rows.push([
          parent,
          x + (child === 0 ? step : 0),
          y + (child === 1 ? step : 0),
          z,
          radius,
          1e-6 / 2 ** generation,
        ]);
      }
    }
    before = now;
    radius *= ratio;
  }
  return forestOf(rows);
}

describe('solveFlow', () => {
  // Source: Hagen–Poiseuille and Kirchhoff; computed to 40 digits, nine printed. With γ = 3 every generation has the same
  // pressure drop and the same volume.
  const TABLE = [
    [3, 1833.46494, 13.7521161, 628.318531, 183.346494, 183.346494],
    [2.55, 3379.09462, 25.3452903, 385.124499, 183.346494, 551.288679],
    [2, 13721.7654, 102.92169, 207.817572, 183.346494, 4148.65758],
  ] as const;
  for (const [exponent, total, mmhg, volume, first, last] of TABLE) {
    it(`matches the ten-generation tree of γ = ${exponent}`, () => {
      const forest = symmetricTree(exponent);
      const field = solveFlow(forest, ['supply'], { rootPressures: [20000], viscosity: 0.0036, density: 1060 });
      const children = listChildren(forest);
      let terminals = 0;
      for (let i = 0; i < forest.count; i++) {
        if (children.start[i + 1]! > children.start[i]!) continue;
        terminals++;
        near(20000 - field.pressure[i]!, total, 5e-9);
        near(fromSi(20000 - field.pressure[i]!, 'mmHg'), mmhg, 5e-9);
        near(field.pressure[forest.parent[i]!]! - field.pressure[i]!, last, 5e-9);
      }
      expect(terminals).toBe(2 ** 9);
      near(20000 - field.pressure[1]!, first, 5e-9);
      near(measurePower(forest, 0.0036, 0).volume * 1e9, volume, 5e-9);
    });
  }

  it('agrees with a dense solve and turns round for a draining tree', () => {
    for (let round = 0; round < 20; round++) {
      const forest = randomForest(`dense-${round}`, 2 + round, 2, 1);
      const n = forest.count;
      const kinds = ['supply', 'drain'] as const;
      const viscosity = Float64Array.from({ length: n }, (_, i) => 0.003 + 0.001 * ((i * 7) % 5));
      const field = solveFlow(forest, kinds, { rootPressures: [8000, 1000], viscosity, density: 1060 });
      const resistance = Array.from({ length: n }, (_, i) =>
        tubeResistance(tubeLength(forest, i), forest.radius[i]!, viscosity[i]!),
      );
      const children = listChildren(forest);
      const fixed = Array.from({ length: n }, (_, i) =>
        forest.parent[i]! < 0 || children.start[i] === children.start[i + 1] ? field.pressure[i]! : Number.NaN,
      );
      const want = densePressures(forest, resistance, fixed);
      for (let i = 0; i < n; i++) {
        const root = forest.treeStart[forest.tree[i]!]!;
        const span = Math.max(
          ...fixed
            .filter((p, k) => forest.tree[k] === forest.tree[i] && !Number.isNaN(p))
            .map((p) => Math.abs(p - fixed[root]!)),
        );
        expect(Math.abs(field.pressure[i]! - want[i]!) / span).toBeLessThan(1e-10);
        const parent = forest.parent[i]!;
        if (parent < 0) continue;
        const fall = field.pressure[parent]! - field.pressure[i]!;
        expect(forest.tree[i] === 0 ? fall : -fall).toBeGreaterThan(0);
        const drop = (2 * field.wallShear[i]! * tubeLength(forest, i)) / forest.radius[i]!;
        expect(Math.abs(Math.abs(fall) - drop)).toBeLessThan(1e-12 * (span + 8000));
      }
    }
  });

  it('adds up transit times', () => {
    // 1 cm at 1 cm/s, then 2 cm at 4 cm/s through half the radius.
    const area = 1e-6;
    const q = 1e-8;
    const r = Math.sqrt(area / Math.PI);
    const forest = forestOf([
      [-1, 0, 0, 0, r, q],
      [0, 0.01, 0, 0, r, q],
      [1, 0.01, 0.02, 0, r / 2, q],
    ]);
    const field = solveFlow(forest, ['supply'], { rootPressures: [0], viscosity: 1e-3, density: 1000 });
    near(field.transit[1]!, 0.01 / 0.01, 1e-12);
    near(field.transit[2]!, 1 + 0.02 / 0.04, 1e-12);
    expect(field.transit[0]).toBe(0);
    near(field.velocity[0]!, 0.01, 1e-12);
    near(field.reynolds[1]!, (1000 * 0.01 * 2 * r) / 1e-3, 1e-12);
    expect(Array.from(field.haematocrit)).toEqual([0, 0, 0]);
  });

  it('refuses options that do not fit', () => {
    const forest = randomForest('refuse', 3);
    const fine = { rootPressures: [1], viscosity: 1e-3, density: 1000 };
    expect(() => solveFlow(forest, [], fine)).toThrow(/0 kinds/);
    expect(() => solveFlow(forest, ['supply'], { ...fine, viscosity: 0 })).toThrow(/expected > 0/);
    expect(() => solveFlow(forest, ['supply'], { ...fine, viscosity: new Float64Array(2) })).toThrow(/2 values/);
  });
});

describe('measurePower', () => {
  it('is pressure drop times flow, summed, plus maintenance times volume', () => {
    const forest = randomForest('power', 40, 2);
    const field = solveFlow(forest, ['supply', 'drain'], { rootPressures: [0, 0], viscosity: 0.0035, density: 1060 });
    let pumping = 0;
    let volume = 0;
    for (let i = 0; i < forest.count; i++) {
      const parent = forest.parent[i]!;
      if (parent < 0) continue;
      pumping += Math.abs(field.pressure[parent]! - field.pressure[i]!) * forest.flow[i]!;
      volume += Math.PI * forest.radius[i]! * forest.radius[i]! * tubeLength(forest, i);
    }
    const power = measurePower(forest, 0.0035, 600);
    near(power.pumping, pumping, 1e-9);
    near(power.volume, volume, 1e-12);
    near(power.maintenance, 600 * volume, 1e-12);
    near(power.total, pumping + 600 * volume, 1e-9);
  });
});
