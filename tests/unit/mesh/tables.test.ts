import { expect, it } from 'vitest';
import { solveFlow } from '../../../src/flow/solve.ts';
import { boundaryTable } from '../../../src/mesh/boundary-table.ts';
import { buildLumen } from '../../../src/mesh/build-lumen.ts';
import { networkTable } from '../../../src/mesh/network-table.ts';
import { forkSketch, sketchForest } from '../../support/lumen-forests.ts';

const DENSITY = 1060;
const VISCOSITY = 3.5e-3;
const forest = sketchForest(forkSketch(40, 30, 0.8, 0.6));
const field = solveFlow(forest, ['supply'], { rootPressures: [8000], viscosity: VISCOSITY, density: DENSITY });

it('tells a solver what holds at each cap', () => {
  const rows = boundaryTable(buildLumen(forest, { around: 8 }), forest, field, DENSITY);
  expect(rows.map((row) => `${row.patch} ${row.type}`)).toEqual([
    'inlet_0 inlet',
    'outlet_1 outlet',
    'outlet_2 outlet',
  ]);
  const [inlet, first, second] = rows as [(typeof rows)[0], (typeof rows)[0], (typeof rows)[0]];
  expect(inlet.flow).toBeCloseTo(first.flow + second.flow, 24);
  expect(inlet.pressure).toBe(8000);
  expect(inlet.resistance).toBeNull();
  expect(first.resistance).toBe(0);
  for (const row of rows) {
    expect(Math.hypot(...row.normal)).toBeCloseTo(1, 12);
    // v = Q / (π r²), Re = 2 ρ Q / (π r μ): Hagen–Poiseuille, any fluid-mechanics text; from memory.
    expect(row.velocity).toBeCloseTo(row.flow / (Math.PI * row.radius ** 2), 12);
    expect(row.reynolds / ((2 * DENSITY * row.flow) / (Math.PI * row.radius * VISCOSITY))).toBeCloseTo(1, 12);
  }
  expect(inlet.normal).toEqual([-1, -0, -0]);
  expect(first.vessel).toBe(1);
});

it('lists the network upstream to downstream', () => {
  const rows = networkTable(forest, field);
  expect(rows.map((row) => [row.segment, row.from, row.to])).toEqual([
    [0, 0, 1],
    [1, 1, 2],
    [2, 1, 3],
  ]);
  for (const row of rows) {
    const drop = (8 * VISCOSITY * row.length * row.flow) / (Math.PI * row.radius ** 4);
    expect((row.pressures[0] - row.pressures[1]) / drop).toBeCloseTo(1, 9);
  }
  const back = solveFlow(forest, ['drain'], { rootPressures: [500], viscosity: VISCOSITY, density: DENSITY });
  for (const row of networkTable(forest, back, { kinds: ['drain'] })) {
    expect(row.pressures[0]).toBeGreaterThan(row.pressures[1]);
    expect(row.to).toBeLessThan(row.from);
  }
});

it('refuses a solution of another forest', () => {
  const other = sketchForest(forkSketch(40, 30, 0.8, 0.6));
  expect(() => networkTable(other, field)).toThrow('another forest');
  expect(() => boundaryTable(buildLumen(other, { around: 8 }), other, field, DENSITY)).toThrow('another forest');
});
