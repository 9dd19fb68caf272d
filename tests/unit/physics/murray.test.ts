import { describe, expect, it } from 'vitest';
import {
  flowWeight,
  leastPowerCostFactor,
  leastPowerRadius,
  leastPowerShear,
  maintenanceForShear,
} from '../../../src/physics/murray.ts';

const MAINTENANCE = 4500 / 7;

// Source: Murray CD 1926, PNAS 12:207–214; from memory, algebra re-derived and computed to 40 digits; nine digits are
// printed, inputs to six (642.857 is 4500/7, 8.33333e-6 is 500 mL/min).
const TABLE = [
  [0.0036, MAINTENANCE, 1.0e-6, 0.001444335361, 0.00210654353, 0.00421308707, 0.0063196306, 1.52127766],
  [0.0036, 625, 1.0e-6, 0.001451132671, 0.0020673506, 0.0041347012, 0.0062020518, 1.5],
  [0.0036, 77.8, 1.0e-6, 0.002053637835, 0.000515403291, 0.00103080658, 0.00154620987, 0.52922585],
  [0.0036, 625, 1.0e-9, 0.0001451132671, 2.0673506e-5, 4.1347012e-5, 6.2020518e-5, 1.5],
  [0.0036, 625, 25e-6 / 3, 0.002942027343, 0.00849754169, 0.0169950834, 0.0254926251, 1.5],
] as const;

describe('leastPowerRadius', () => {
  for (const [viscosity, maintenance, flow, radius, pumping, keeping, total, shear] of TABLE) {
    it(`matches the published optimum for Q ${flow}, m ${maintenance}`, () => {
      const r = leastPowerRadius(flow, viscosity, maintenance);
      const near = (got: number, want: number) => expect(Math.abs(got / want - 1)).toBeLessThan(5e-9);
      near(r, radius);
      const pump = (8 * viscosity * flow * flow) / (Math.PI * r * r * r * r);
      const keep = maintenance * Math.PI * r * r;
      near(pump, pumping);
      near(keep, keeping);
      near(pump + keep, total);
      near(leastPowerCostFactor(viscosity, maintenance) * flowWeight(flow), total);
      near(1.5 * maintenance * Math.PI * r * r, total);
      near(leastPowerShear(viscosity, maintenance), shear);
      expect(keep / pump).toBeCloseTo(2, 12);
      expect((4 * viscosity * flow) / (Math.PI * r * r * r)).toBeCloseTo(leastPowerShear(viscosity, maintenance), 12);
    });
  }

  it('has the published cost factor and volume per length', () => {
    expect(Math.abs(leastPowerCostFactor(0.0036, 625) / 62.0205180211 - 1)).toBeLessThan(1e-11);
    const r = leastPowerRadius(1, 0.0036, 625);
    expect(Math.abs((Math.PI * r * r) / 0.0661552192225 - 1)).toBeLessThan(1e-11);
  });

  it('gives the maintenance that a wall shear asks for', () => {
    expect(maintenanceForShear(1.5, 0.0036)).toBeCloseTo((1.5 * 1.5) / 0.0036, 12);
    expect(leastPowerShear(0.0036, maintenanceForShear(1.5, 0.0036))).toBeCloseTo(1.5, 14);
  });

  it('makes radii obey the cube law at a junction', () => {
    const cube = (flow: number) => {
      const r = leastPowerRadius(flow, 0.0035, 600);
      return r * r * r;
    };
    expect((cube(3e-9) + cube(1e-9)) / cube(4e-9)).toBeCloseTo(1, 14);
  });

  it('refuses what is not positive', () => {
    expect(() => leastPowerRadius(1e-9, 0, 625)).toThrow(/leastPowerRadius/);
    expect(() => leastPowerRadius(-1e-9, 0.0036, 625)).toThrow(/flow/);
    expect(() => leastPowerCostFactor(0.0036, Number.NaN)).toThrow(/leastPowerCostFactor/);
  });
});
