import { describe, expect, it } from 'vitest';
import { fromSi, MMHG } from '../../../src/core/units.ts';
import {
  meanVelocity,
  pumpingPower,
  radiusForDrop,
  reynolds,
  tubeResistance,
  wallShear,
} from '../../../src/physics/poiseuille.ts';

const near = (got: number, want: number, tolerance = 1e-9) =>
  expect(Math.abs(got / want - 1), `${got} against ${want}`).toBeLessThan(tolerance);

// Source: Hagen–Poiseuille law, any fluid-mechanics text; from memory, computed to 40 digits. Nine digits are printed.
// The Reynolds numbers of the table use 1060 kg/m³.
const TABLE = [
  [
    'artery',
    0.0036,
    0.001,
    0.02,
    1e-6,
    183346494.0,
    183.346494,
    1.37521161,
    4.58366236,
    0.318309886,
    187.449155,
    0.000183346494,
  ],
  [
    'arteriole',
    0.0036,
    1e-5,
    1e-4,
    1e-13,
    9.16732472e13,
    9.16732472,
    0.0687605803,
    0.458366236,
    0.000318309886,
    0.00187449155,
    9.16732472e-13,
  ],
  [
    'aorta-like',
    0.0035,
    0.012,
    0.3,
    250e-6 / 3,
    128944.977,
    10.7454148,
    0.0805972272,
    0.214908295,
    0.18420711,
    1338.92254,
    0.000895451229,
  ],
] as const;

describe('poiseuille', () => {
  for (const [name, viscosity, radius, length, flow, resistance, drop, mmhg, shear, velocity, re, power] of TABLE) {
    it(`matches the worked case: ${name}`, () => {
      const r = tubeResistance(length, radius, viscosity);
      near(r, resistance, 5e-9);
      near(r * flow, drop, 5e-9);
      near(fromSi(r * flow, 'mmHg'), mmhg, 5e-9);
      near(wallShear(flow, radius, viscosity), shear, 5e-9);
      near(wallShear(flow, radius, viscosity), (radius * r * flow) / (2 * length), 1e-13);
      near(meanVelocity(flow, radius), velocity, 5e-9);
      near(reynolds(flow, radius, viscosity, 1060), re, 5e-9);
      near(pumpingPower(flow, length, radius, viscosity), power, 5e-9);
    });
  }

  // Source: mmHg = 13 595.1 kg/m³ × 9.80665 m/s² × 1 mm (ISO 80000-4 / NIST SP 811); from memory, computed.
  it('uses the conventional millimetre of mercury', () => {
    near(MMHG, 13595.1 * 9.80665 * 1e-3, 1e-12);
    near(100 * MMHG, 13332.23874);
  });

  // Source: computed from the formula; doubling by a diameter of 2^(−1/4), a change of −15.9103585 %.
  it('doubles resistance when the diameter shrinks by the fourth root of two', () => {
    near(tubeResistance(1, 0.840896415254, 1) / tubeResistance(1, 1, 1), 2, 1e-11);
  });

  // Source: Schreiner & Buxbaum 1993 (IEEE TBME 40:482), the single segment worked from r = (8ηlQ/(πΔp))^(1/4); from
  // memory, verified numerically; 1e-8.
  it('finds the radius of a worked single tube', () => {
    const flow = 500e-6 / 60;
    near(radiusForDrop(flow, 0.05, 0.0036, 40 * MMHG), 0.9199560397e-3, 1e-9);
    near(radiusForDrop(flow, 0.05, 0.0036, 28 * MMHG), 1.005755845e-3, 1e-9);
  });

  it('refuses a tube without a lumen', () => {
    expect(tubeResistance(0, 1, 1)).toBe(0);
    expect(() => tubeResistance(1, 0, 1)).toThrow(/tubeResistance: radius 0 m/);
    expect(() => wallShear(1, Number.NaN, 1)).toThrow(/wallShear/);
    expect(() => radiusForDrop(1, 1, 1, 0)).toThrow(/radiusForDrop/);
  });
});
