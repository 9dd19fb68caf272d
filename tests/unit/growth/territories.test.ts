import { describe, expect, it } from 'vitest';
import { growRun } from '../../../src/run.ts';
import { specFromValue } from '../../../src/spec/parse.ts';
import { buildTissue } from '../../../src/tissue/build-tissue.ts';
import { measureTerritories } from '../../../src/tissue/territories.ts';

const TISSUE = {
  shape: 'box',
  min_mm: [0, 0, 0],
  max_mm: [12, 12, 6],
  demand: [
    { shape: 'sphere', center_mm: [8, 8, 3], radius_mm: 2.5, weight: 4 },
    { shape: 'box', min_mm: [2, 0, 0], max_mm: [5, 4, 6], weight: 0 },
  ],
};
const POINTS = [2, 5, 8, 11].flatMap((x) => [2, 6, 10].map((y) => [x, y, x === 5 ? 2 : 4]));

const grow = (terminals: object, sizing: object, flow = 0.15, kind = 'supply') =>
  growRun(
    specFromValue({
      tissue: TISSUE,
      trees: [
        {
          kind,
          inlet: {
            position_mm: [0, 6, 3],
            direction: [1, 0, 0],
            pressure_mmHg: kind === 'drain' ? 5 : 60,
            flow_mL_min: flow,
          },
          terminals: { ...terminals, pressure_mmHg: 20, flow_share: 'territory' },
        },
      ],
      sizing,
      clearance: { gap_um: 10 },
    }),
    new Map(),
  );

describe('flow shared by territory', () => {
  it.each([
    ['least power, by count', { count: 120 }, { rule: 'least-power' }, 0.15, 'supply'],
    [
      'a junction exponent, by count',
      { count: 120 },
      { rule: 'junction-exponent', junction_exponent: 2.7 },
      0.6,
      'supply',
    ],
    ['asked pressures, by count', { count: 120 }, { rule: 'pressure-matched' }, 0.6, 'supply'],
    ['asked pressures, by spacing, draining', { spacing_um: 1500 }, { rule: 'pressure-matched' }, 0.6, 'drain'],
    [
      'a terminal radius, by points',
      { points_mm: POINTS },
      { rule: 'junction-exponent', terminal_radius_um: 40 },
      0.15,
      'supply',
    ],
  ] as const)('%s: all promises hold and flows are those of the territories', (_, terminals, sizing, flow, kind) => {
    const { record, check, stopped, spec } = grow(terminals, sizing, flow, kind);
    // A site at a wall may find no room, whatever shares the flow; it is told, and is no finding by spacing.
    if ('spacing_um' in terminals) expect(record.forest.count).toBeGreaterThan(600);
    else expect(stopped).toBe('complete');
    expect(check.findings).toEqual([]);
    const { forest } = record;
    const territory = record.territory!;
    const leaf = Array.from({ length: forest.count }, (_, i) => i > 0 && !forest.parent.includes(i));
    const rows = leaf.flatMap((is, i) => (is ? [i] : []));
    for (let i = 0; i < forest.count; i++) expect(territory[i]! > 0).toBe(leaf[i]);
    const points = Float64Array.from(rows.flatMap((i) => [0, 1, 2].map((k) => forest.position[3 * i + k]!)));
    const measured = measureTerritories(buildTissue(spec.tissue, new Map(), [], spec.demand), points);
    const whole = measured.reduce((sum, size) => sum + size, 0);
    rows.forEach((row, i) => {
      expect(territory[row]! / measured[i]!).toBeCloseTo(1, 12);
      expect((forest.flow[row]! * whole) / (forest.flow[0]! * measured[i]!)).toBeCloseTo(1, 9);
    });
    // They do differ: this is no test of equal shares.
    expect(Math.max(...measured) / Math.min(...measured)).toBeGreaterThan(2);
  });

  it('gives a point that stands where nothing is demanded some flow all the same', () => {
    const corner = [[3.5, 0.5, 1], [3.5, 3.5, 1], [2.3, 2, 1], [4.7, 2, 1], [3.5, 2, 1.5], [3.5, 2, 0.6], ...POINTS];
    const { record, check } = grow({ points_mm: corner }, { rule: 'least-power' }, 0.05);
    expect(check.findings.filter((finding) => finding.promise !== 'terminals')).toEqual([]);
    const sizes = [...record.territory!].filter((size) => size > 0);
    const { whole } = buildTissue(
      specFromValue({
        tissue: TISSUE,
        trees: [{ inlet: { position_mm: [0, 6, 3], flow_uL_min: 1 }, terminals: { count: 1 } }],
      }).tissue,
      new Map(),
    ).perfusion;
    expect(Math.min(...sizes)).toBeGreaterThan(0);
    expect(Math.min(...sizes)).toBeLessThan(whole / sizes.length / 20);
  });

  it('is equal where nothing else is asked, and then no territory is told', () => {
    const spec = specFromValue({
      tissue: TISSUE,
      trees: [{ inlet: { position_mm: [0, 6, 3], flow_mL_min: 0.15 }, terminals: { count: 30, flow_share: 'equal' } }],
    });
    const { record, check } = growRun(spec, new Map());
    expect(check.held).toBe(true);
    expect(record.territory).toBeUndefined();
    const flows = new Set(
      [...record.forest.flow].map((flow) => Number((flow / record.forest.flow[0]!).toPrecision(9))),
    );
    expect(flows.has(Number((1 / 30).toPrecision(9)))).toBe(true);
  });
});
