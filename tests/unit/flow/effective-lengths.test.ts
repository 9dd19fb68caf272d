import { describe, expect, it } from 'vitest';
import {
  effectiveLengths,
  immersedLength,
  junctionLosses,
  LEAST_LENGTH_SHARE,
} from '../../../src/flow/effective-lengths.ts';
import { solveFlow } from '../../../src/flow/solve.ts';
import { tubeResistance } from '../../../src/physics/poiseuille.ts';
import { tubeLength } from '../../../src/tree/vessels.ts';
import { type Sketch, sketchForest } from '../../support/lumen-forests.ts';

const DEGREE = Math.PI / 180;
const cos = (degrees: number): number => Math.cos(degrees * DEGREE);
const sin = (degrees: number): number => Math.sin(degrees * DEGREE);

function losses(...tubes: readonly (readonly [turn: number, radius: number, lift?: number])[]): number[] {
  const axis = tubes.flatMap(([turn, , lift = 0]) => [cos(turn) * cos(lift), sin(turn) * cos(lift), sin(lift)]);
  const radius = tubes.map((tube) => tube[1]);
  const out = new Float64Array(tubes.length);
  junctionLosses(axis, radius, tubes.length, out);
  return [...out];
}

describe('immersedLength', () => {
  it('of a hair in a wide tube ends where its axis leaves the wall', () => {
    for (const angle of [30, 60, 90]) expect(immersedLength(1e-9, 2, cos(angle))).toBeCloseTo(2 / sin(angle), 6);
    for (const angle of [120, 180]) expect(immersedLength(1e-9, 2, cos(angle))).toBeCloseTo(2, 6);
  });

  it('is the same for two equal tubes, and nothing for two in line', () => {
    expect(immersedLength(1, 1, cos(180))).toBeCloseTo(0, 12);
    expect(immersedLength(1, 1, cos(90))).toBeCloseTo(0.5, 12);
    for (const angle of [30, 60, 90, 120]) {
      const slim = immersedLength(1, 1 + 1e-12, cos(angle));
      const wide = immersedLength(1 + 1e-12, 1, cos(angle));
      expect(wide).toBeCloseTo(slim, 9);
    }
  });

  it('does not jump at a right angle', () => {
    for (const [own, other] of [
      [1, 0.3],
      [0.3, 1],
    ] as const) {
      expect(immersedLength(own, other, 1e-9)).toBeCloseTo(immersedLength(own, other, -1e-9), 7);
    }
  });

  it('leaves a wide tube alone beside a hair, but for what they share', () => {
    expect(immersedLength(1, 1e-6, cos(120))).toBeCloseTo(0, 9);
    expect(immersedLength(1, 1e-6, cos(30))).toBeCloseTo(cos(30) / sin(30), 9);
  });
});

describe('junctionLosses', () => {
  it('moves the junction along a trunk to where a hair’s axis leaves it', () => {
    const [up, down, hair] = losses([180, 1], [0, 1], [45, 1e-4]);
    expect(down).toBeCloseTo(1, 3);
    expect(up).toBeCloseTo(-1, 3);
    expect(hair).toBeCloseTo(Math.SQRT2, 3);
  });

  it('scales with the radii and does not depend on the order of tubes', () => {
    const plain = losses([180, 1], [-20, 0.9], [50, 0.6]);
    const scaled = losses([50, 3 * 0.6], [180, 3], [-20, 3 * 0.9]);
    expect(scaled[0]).toBeCloseTo(3 * plain[2]!, 12);
    expect(scaled[1]).toBeCloseTo(3 * plain[0]!, 12);
    expect(scaled[2]).toBeCloseTo(3 * plain[1]!, 12);
  });

  // Losses in parent radii from finite-element solutions at 16 and 24 segments round: turns of the daughters from the
  // parent's way to either side, their radii, losses of parent and daughters. Measured with judge-flow.py.
  it.each([
    [0, 1, 60, 0.2, [-0.492, 0.532, 1.118]],
    [0, 0.985, 30, 0.35, [-1.809, 1.826, 2.245]],
    [10, 0.956, 40 - 10, 0.5, [-1.296, 1.293, 1.624]],
    [30, 0.794, 30, 0.794, [-0.551, 0.757, 0.751]],
    [60, 0.794, 60, 0.794, [0.111, 0.316, 0.318]],
    [20, 0.794, 120, 0.794, [0.758, 0.07, 0.931]],
    [66, 0.973, 33, 0.321, [0.125, 0.223, 0.819]],
    [10, 0.909, 133, 0.702, [1.154, -0.477, 1.376]],
  ] as const)(
    'is within 0.16 parent radii of Stokes flow: daughters at %d° of %d and at %d° of %d',
    (a1, r1, a2, r2, want) => {
      const got = losses([180, 1], [a1, r1], [-a2, r2]);
      for (let k = 0; k < 3; k++) expect(Math.abs(got[k]! - want[k]!), `tube ${k}: ${got[k]}`).toBeLessThan(0.16);
    },
  );

  it('of four tubes leaves none longer than three thin ones would', () => {
    const four = losses([180, 1], [0, 0.7], [60, 0.5], [-60, 0.5]);
    for (const loss of four) expect(loss).toBeGreaterThan(-0.5);
  });
});

describe('effectiveLengths', () => {
  const fork: Sketch = [
    [-1, -8e-3, 0, 0, 1e-3],
    [0, 0, 0, 0, 1e-3],
    [1, 8e-3, 0, 0, 0.9e-3],
    [1, 0, 4e-3, 0, 0.3e-3],
  ];

  it('takes off each vessel what it loses at its ends', () => {
    const forest = sketchForest(fork);
    const got = effectiveLengths(forest);
    const lost = losses([180, 1e-3], [0, 0.9e-3], [90, 0.3e-3]);
    expect(got[0]).toBe(0);
    for (let row = 1; row < forest.count; row++) {
      // The forest keeps the sketch's order here: trunk, its continuation, the side branch.
      expect(got[row]).toBeCloseTo(tubeLength(forest, row) - lost[row - 1]!, 12);
    }
    expect(got[3]).toBeCloseTo(4e-3 - 1e-3 + 0.5 * 0.3e-3, 9);
  });

  it('keeps a share of a vessel that is all immersed', () => {
    const forest = sketchForest(fork.map(([p, x, y, z, r]) => [p, x, y > 0 ? 0.9e-3 : y, z, r] as const));
    expect(effectiveLengths(forest)[3]).toBeCloseTo(LEAST_LENGTH_SHARE * 0.9e-3, 12);
  });

  it('leaves a straight line of equal tubes as it is', () => {
    const forest = sketchForest([
      [-1, 0, 0, 0, 1e-3],
      [0, 5e-3, 0, 0, 1e-3],
      [1, 9e-3, 0, 0, 1e-3],
    ]);
    const got = effectiveLengths(forest);
    expect(got[1]).toBeCloseTo(5e-3, 15);
    expect(got[2]).toBeCloseTo(4e-3, 15);
  });

  it('is what the solver takes for lengths; transit keeps the axes', () => {
    const forest = sketchForest(fork);
    const options = { rootPressures: [100], viscosity: 3.5e-3, density: 1060 };
    const axis = solveFlow(forest, ['supply'], options);
    const lengths = effectiveLengths(forest);
    const field = solveFlow(forest, ['supply'], { ...options, lengths });
    expect(field.pressure[3]).toBeCloseTo(
      100 -
        tubeResistance(lengths[1]!, 1e-3, 3.5e-3) * forest.flow[1]! -
        tubeResistance(lengths[3]!, 0.3e-3, 3.5e-3) * forest.flow[3]!,
      9,
    );
    expect(field.pressure[3]).toBeGreaterThan(axis.pressure[3]!);
    expect([...field.transit]).toEqual([...axis.transit]);
    expect(() => solveFlow(forest, ['supply'], { ...options, lengths: [1] as never })).toThrow(/got 1 lengths for 4/);
  });
});
