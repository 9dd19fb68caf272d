// biome-ignore-all lint/suspicious/noApproximativeNumericConstant: the digits are the printed ones of a table
import { describe, expect, it } from 'vitest';
import { childRadii, parentRadius, powerOf, rootOf, symmetricRatios } from '../../../src/physics/junction.ts';

const near = (got: number, want: number, tolerance = 5e-9) =>
  expect(Math.abs(got / want - 1), `${got} against ${want}`).toBeLessThan(tolerance);

// Source: the formulas r1/r0 = 2^(−1/γ), area 2^(1−2/γ), resistance 2^(1−4/γ), shear 2^(3/γ−1), computed to 40 digits.
// The row of 2.3333 is 7/3 as the printed digits show.
const SYMMETRIC = [
  [2.0, 0.707106781, 1.0, 0.5, 1.41421356],
  [2.1, 0.718873349, 1.03355778, 0.534120845, 1.34590019],
  [7 / 3, 0.742997145, 1.10408951, 0.609506827, 1.21901365],
  [2.5, 0.757858283, 1.14869835, 0.659753955, 1.14869835],
  [2.55, 0.76198956, 1.16125618, 0.674257958, 1.13011578],
  [2.7, 0.773583876, 1.19686403, 0.716241749, 1.08005974],
  [3.0, 0.793700526, 1.25992105, 0.793700526, 1.0],
  [4.0, 0.840896415, 1.41421356, 1.0, 0.840896415],
] as const;

// Source: the formula, computed; γ = 3; radius ratio of the smaller to the larger child.
const ASYMMETRIC = [
  [0.1, 0.999666889, 0.0999666889, 1.00932723],
  [0.25, 0.994845269, 0.248711317, 1.05157443],
  [0.5, 0.961499714, 0.480749857, 1.15560212],
  [0.75, 0.889295703, 0.666971777, 1.2356982],
  [1, 0.793700526, 0.793700526, 1.25992105],
] as const;

describe('junction law', () => {
  for (const [exponent, radius, area, resistance, shear] of SYMMETRIC) {
    it(`has the tabled ratios of equal children for γ = ${exponent.toFixed(4)}`, () => {
      const got = symmetricRatios(exponent);
      near(got.radius, radius);
      near(got.area, area);
      near(got.resistance, resistance);
      near(got.shear, shear);
      near(parentRadius(radius, radius, exponent), 1);
    });
  }

  for (const [ratio, large, small, area] of ASYMMETRIC) {
    it(`splits the cube law at radius ratio ${ratio}`, () => {
      const out = new Float64Array(2);
      childRadii(1 / ratio, 3, out);
      near(out[0]!, large);
      near(out[1]!, small);
      near(out[0]! * out[0]! + out[1]! * out[1]!, area);
      childRadii(ratio, 3, out);
      near(out[0]!, small);
      near(out[1]!, large);
      near(parentRadius(large, small, 3), 1);
    });
  }

  it('takes powers and roots back and forth', () => {
    for (const exponent of [2, 2.1, 2.55, 3, 3.7, 4]) {
      for (const x of [1e-6, 1 / 3, 7]) near(rootOf(powerOf(x, exponent), exponent), x, 1e-14);
    }
    near(powerOf(2, 2.5), 4 * Math.SQRT2, 1e-14);
  });

  it('holds far from 1 and refuses no radius', () => {
    near(parentRadius(1e-150, 1e-150, 3), 1e-150 * Math.cbrt(2), 1e-14);
    expect(() => parentRadius(0, 1, 3)).toThrow(/parentRadius/);
  });
});
