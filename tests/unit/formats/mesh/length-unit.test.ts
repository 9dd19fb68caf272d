import { expect, it } from 'vitest';
import { positionsIn } from '../../../../src/formats/mesh/length-unit.ts';

it('takes positions from any unit to any other, and leaves them alone where it is theirs', () => {
  const given = Float64Array.of(1 / 3, -12, 0);
  for (const unit of ['m', 'mm', 'um'] as const) expect(positionsIn(given, unit, unit)).toBe(given);
  const metres = { m: 1, mm: 1e-3, um: 1e-6 };
  for (const from of ['m', 'mm', 'um'] as const) {
    for (const to of ['m', 'mm', 'um'] as const) {
      const scale = metres[from] / metres[to];
      positionsIn(given, to, from).forEach((x, i) => {
        expect(Math.abs(x - scale * given[i]!)).toBeLessThanOrEqual(2 ** -51 * Math.abs(x));
      });
    }
  }
  expect(positionsIn(given, 'mm')[1]).toBe(-12_000);
  // Divided, not multiplied by a thousandth: exact.
  expect(positionsIn(Float64Array.of(12), 'm', 'mm')[0]).toBe(0.012);
});
