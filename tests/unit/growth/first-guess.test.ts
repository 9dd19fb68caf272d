import { expect, test } from 'vitest';
import { firstGuess } from '../../../src/growth/first-guess.ts';
import { specFromValue } from '../../../src/spec/parse.ts';
import { buildTissue } from '../../../src/tissue/build-tissue.ts';

test('is 1.6 times as wide as a tube that drops half of what is asked on its way to the middle', () => {
  const spec = specFromValue({
    tissue: { shape: 'box', min_mm: [0, 0, 0], max_mm: [6, 4, 12] },
    trees: [
      {
        inlet: { position_mm: [0, 0, 0], direction: [1, 1, 1], flow_mL_min: 0.6, pressure_mmHg: 50 },
        terminals: { count: 10, pressure_mmHg: 20 },
      },
    ],
    sizing: { rule: 'pressure-matched' },
  });
  const radius = firstGuess(spec, 0, buildTissue(spec.tissue, new Map())) / 1.6;
  // Half of the box's diagonal of 14 mm; Poiseuille's law, Δp = 8 µ L Q / (π r⁴). mmHg: 101325/760 Pa.
  const flow = 0.6e-6 / 60;
  const drop = (8 * 3.5e-3 * 7e-3 * flow) / (Math.PI * radius * radius * radius * radius);
  expect(drop / (0.5 * 30 * (101325 / 760))).toBeCloseTo(1, 6);
});
