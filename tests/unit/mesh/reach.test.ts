import { expect, it } from 'vitest';
import { reach } from '../../../src/mesh/reach.ts';

it('finds the ball on which two circles touch', () => {
  for (const [a, b, degrees] of [
    [1, 1, 25],
    [1, 0.5, 60],
    [0.3, 2, 80],
    [1, 1, 120],
  ] as const) {
    const angle = (degrees * Math.PI) / 180;
    const ball = reach(a, b, angle);
    // The definition: asin(a/ρ) + asin(b/ρ) = θ.
    expect(Math.asin(a / ball) + Math.asin(b / ball)).toBeCloseTo(angle, 12);
  }
  // Equal tubes: ρ = r / sin(θ/2).
  expect(reach(1, 1, Math.PI / 3)).toBeCloseTo(1 / Math.sin(Math.PI / 6), 12);
  // Nothing is smaller than the wider tube.
  expect(reach(1, 0.2, Math.PI)).toBe(1);
  expect(reach(0.2, 1, (150 * Math.PI) / 180)).toBe(1);
});
