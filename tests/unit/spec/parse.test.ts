import { describe, expect, test } from 'vitest';
import { InputError } from '../../../src/core/errors.ts';
import { MMHG } from '../../../src/core/units.ts';
import { parseSpec, specFromValue } from '../../../src/spec/parse.ts';
import { type Bendable, soundSpec } from '../../support/bend-spec.ts';

/** Places of all faults of a value, in order. */
function faultsOf(value: unknown): readonly { code: string; where: string; message: string }[] {
  try {
    specFromValue(value);
  } catch (error) {
    if (error instanceof InputError) return error.faults;
    throw error;
  }
  return [];
}

function bend(change: (spec: Bendable) => void): Bendable {
  const spec = soundSpec();
  change(spec);
  return spec;
}

const LEAST = {
  tissue: { shape: 'sphere', center_mm: [0, 0, 0], radius_mm: 5 },
  trees: [{ inlet: { position_mm: [-5, 0, 0], flow_mL_min: 1 }, terminals: { count: 10 } }],
};

describe('what a spec comes to', () => {
  test('a whole small spec, in SI', () => {
    const spec = specFromValue(soundSpec());
    expect(spec).toEqual({
      name: 'sound',
      seed: 'sound-1',
      tissue: { shape: 'box', min: [0, 0, 0], max: [12 / 1000, 12 / 1000, 6 / 1000] },
      forbidden: [],
      trees: [
        {
          name: 'supply',
          kind: 'supply',
          inlet: {
            position: [0, 6 / 1000, 3 / 1000],
            direction: [1, 0, 0],
            pressure: 60 * MMHG,
            flow: expect.closeTo((1.2 * 1e-6) / 60, 20),
          },
          terminals: { by: 'count', count: 20, pressure: 20 * MMHG },
        },
      ],
      blood: { viscosity: { law: 'constant', value: 3.5 / 1000 }, density: 1060, maintenance: 625 },
      sizing: { rule: 'pressure-matched', exponent: 3 },
      clearance: { gap: 20 / 1e6 },
      junctions: { minAngle: (25 * Math.PI) / 180 },
      refine: 'quick',
    });
  });

  test('every default, from the least spec there is', () => {
    const spec = specFromValue(LEAST);
    expect(spec).toMatchObject({
      name: 'unnamed',
      seed: '1',
      forbidden: [],
      blood: { viscosity: { law: 'constant', value: 3.5e-3 }, density: 1060, maintenance: 625 },
      sizing: { rule: 'least-power' },
      clearance: { gap: 0 },
      refine: 'quick',
    });
    expect(spec.junctions.minAngle).toBeCloseTo((25 * Math.PI) / 180, 15);
    expect(spec.trees[0]).toMatchObject({
      name: 'supply',
      kind: 'supply',
      inlet: { direction: null, pressure: 100 * MMHG },
      terminals: { by: 'count', count: 10, pressure: null },
    });
    expect('purpose' in spec).toBe(false);
  });

  test('the same length in every unit is the same number', () => {
    const radiusOf = (key: string, value: number) => {
      const tissue = { shape: 'sphere', center_m: [0, 0, 0], [key]: value };
      return specFromValue({ ...LEAST, tissue }).tissue;
    };
    expect(radiusOf('radius_mm', 12)).toEqual(radiusOf('radius_m', 0.012));
    expect(radiusOf('radius_um', 12_000)).toEqual(radiusOf('radius_m', 0.012));
  });

  test('the limits of a range belong to it in every unit, and nothing beyond does', () => {
    for (const [key, least, most] of [
      ['radius_m', 1e-7, 10],
      ['radius_mm', 1e-4, 1e4],
      ['radius_um', 0.1, 1e7],
    ] as const) {
      const at = (value: number) =>
        faultsOf({ ...LEAST, tissue: { shape: 'sphere', center_m: [0, 0, 0], [key]: value } });
      expect([at(least), at(most)]).toEqual([[], []]);
      expect(at(least * (1 - 1e-9))[0]?.code).toBe('out-of-range');
      expect(at(most * (1 + 1e-9))[0]?.code).toBe('out-of-range');
    }
    for (const degrees of [15, 60]) expect(faultsOf({ ...LEAST, junctions: { min_angle_deg: degrees } })).toEqual([]);
  });

  test('terminal pressure: 30 mmHg by default, none under least-power, kept where given', () => {
    const pressureUnder = (sizing: object, terminals: object) =>
      specFromValue(bend((spec) => Object.assign(spec, { sizing }) && Object.assign(spec.trees[0], { terminals })))
        .trees[0]?.terminals.pressure;
    expect(pressureUnder({ rule: 'least-power' }, { count: 5 })).toBeNull();
    expect(pressureUnder({ rule: 'least-power' }, { count: 5, pressure_kPa: 2 })).toBe(2000);
    expect(pressureUnder({ rule: 'pressure-matched' }, { count: 5 })).toBe(30 * MMHG);
    expect(pressureUnder({ rule: 'junction-exponent' }, { count: 5, pressure_Pa: 700 })).toBe(700);
  });

  test.each([
    [{ rule: 'junction-exponent' }, { rule: 'junction-exponent', exponent: 3, scale: { by: 'mean-pressure' } }],
    [
      { rule: 'junction-exponent', junction_exponent: 2.7, terminal_radius_um: 8 },
      { rule: 'junction-exponent', exponent: 2.7, scale: { by: 'terminal-radius', radius: 8 / 1e6 } },
    ],
    [
      { rule: 'junction-exponent', inlet_radius_mm: 1.5 },
      { rule: 'junction-exponent', exponent: 3, scale: { by: 'inlet-radius', radius: 1.5 / 1000 } },
    ],
    [
      { rule: 'pressure-matched', junction_exponent: 2.55 },
      { rule: 'pressure-matched', exponent: 2.55 },
    ],
    [{ rule: 'least-power', maintenance_W_m3: 77.8 }, { rule: 'least-power' }],
  ])('sizing %j', (given, wanted) => {
    expect(specFromValue(bend((spec) => Object.assign(spec, { sizing: given }))).sizing).toEqual(wanted);
  });

  test('maintenance counts under every rule, because the cost needs it', () => {
    for (const rule of ['least-power', 'junction-exponent', 'pressure-matched']) {
      const spec = specFromValue(bend((one) => Object.assign(one, { sizing: { rule, maintenance_W_m3: 77.8 } })));
      expect(spec.blood.maintenance).toBe(77.8);
    }
  });

  test('points and shares', () => {
    const terminals = {
      points_mm: [
        [1, 2, 3],
        [4, 5, 6],
        [7, 8, 9],
      ],
      flow_share: [1, 3, 4],
    };
    const spec = specFromValue(bend((one) => Object.assign(one.trees[0], { terminals })));
    expect(spec.trees[0]?.terminals).toMatchObject({ by: 'points', share: [1 / 8, 3 / 8, 4 / 8] });
    const even = specFromValue(
      bend((one) =>
        Object.assign(one.trees[0], {
          terminals: {
            points_mm: [
              [1, 2, 3],
              [4, 5, 6],
            ],
          },
        }),
      ),
    );
    expect(even.trees[0]?.terminals).toMatchObject({ share: [1 / 2, 1 / 2] });
  });

  test('spacing', () => {
    const spec = specFromValue(bend((one) => Object.assign(one.trees[0], { terminals: { spacing_um: 300 } })));
    expect(spec.trees[0]?.terminals).toMatchObject({ by: 'spacing', spacing: 300 / 1e6 });
  });

  test('several trees, supply and drain, names of their own', () => {
    const inlet = { position_mm: [12, 6, 3], flow_mL_min: 1 };
    const drain = { kind: 'drain', inlet: { ...inlet, pressure_mmHg: 5 }, terminals: { count: 5, pressure_mmHg: 12 } };
    const more = { inlet: { ...inlet, position_mm: [6, 0, 3] }, terminals: { count: 5 } };
    const spec = specFromValue(bend((one) => one.trees.push(drain, more)));
    expect(spec.trees.map((tree) => [tree.name, tree.kind])).toEqual([
      ['supply', 'supply'],
      ['tree_1', 'drain'],
      ['tree_2', 'supply'],
    ]);
  });

  test('every shape, nested', () => {
    const sphere = { shape: 'sphere', center_mm: [1, 2, 3], radius_mm: 4 };
    const tissue = {
      shape: 'difference',
      of: { shape: 'union', parts: [sphere, { shape: 'ellipsoid', center_mm: [0, 0, 0], radii_mm: [1, 2, 3] }] },
      minus: [
        { shape: 'intersection', parts: [{ shape: 'cylinder', from_mm: [0, 0, 0], to_mm: [0, 0, 9], radius_um: 500 }] },
        { shape: 'surface', file: 'parts/bean.STL' },
      ],
      forbidden: [sphere],
    };
    const si = { shape: 'sphere', center: [1 / 1000, 2 / 1000, 3 / 1000], radius: 4 / 1000 };
    const spec = specFromValue({ ...LEAST, tissue });
    expect(spec.forbidden).toEqual([si]);
    expect(spec.tissue).toEqual({
      shape: 'difference',
      of: {
        shape: 'union',
        parts: [si, { shape: 'ellipsoid', center: [0, 0, 0], radii: [1 / 1000, 2 / 1000, 3 / 1000] }],
      },
      minus: [
        {
          shape: 'intersection',
          parts: [{ shape: 'cylinder', from: [0, 0, 0], to: [0, 0, 9 / 1000], radius: 500 / 1e6 }],
        },
        { shape: 'surface', file: 'parts/bean.STL', unit: 'mm' },
      ],
    });
  });

  test.each([
    [7, '7'],
    [0, '0'],
    [-1.5, '-1.5'],
    ['gel-1', 'gel-1'],
  ])('seed %j', (given, wanted) => {
    expect(specFromValue({ ...LEAST, seed: given }).seed).toBe(wanted);
  });

  test.each(['none', 'quick', 'thorough', 0, 40, 10_000])('refine %j', (refine) => {
    expect(specFromValue({ ...LEAST, refine }).refine).toBe(refine);
  });

  test('keys for editors and provenance are read over', () => {
    const spec = specFromValue({ $schema: './spec.schema.json', format: 1, version: '0.1.0', ...LEAST });
    expect(spec).toEqual(specFromValue(LEAST));
  });
});

describe('faults', () => {
  test('all of them at once, whatever else is wrong beside', () => {
    const spec = bend((one) => {
      one.nmae = 'x';
      one.tissue.max_mm = [12, -1, Number.NaN];
      one.tissue.forbidden = [{ shape: 'sphere', center_mm: [0, 0, 0], radius_inch: 1 }];
      one.trees[0].inlet.pressure_mmHg = 10;
      one.trees[0].inlet.flow_mL_min = -1;
      one.trees[0].terminals.spacing_um = 1;
      one.trees[0].terminals.pressure_Pa = '3';
      one.trees.push({ name: 'supply', inlet: {}, terminals: { count: 0 } });
      one.blood.viscosity.value_Pa_s = 0.0035;
      one.sizing.junction_exponent = 5;
      one.sizing.terminal_radius_um = 3;
      one.clearance.gap = 3;
      one.refine = -1;
    });
    expect(
      faultsOf(spec)
        .map((fault) => fault.where)
        .sort(),
    ).toEqual(
      [
        'nmae',
        'tissue.max_mm[2]',
        'tissue.forbidden[0].radius_inch',
        'trees[0].inlet.flow_mL_min',
        'trees[0].terminals.spacing_um',
        'trees[0].terminals.pressure_Pa',
        'trees[0].terminals.pressure_mmHg',
        'trees[1].name',
        'trees[1].inlet.position',
        'trees[1].inlet.flow',
        'trees[1].terminals.count',
        'blood.viscosity.value_mPa_s',
        'sizing.junction_exponent',
        'sizing.terminal_radius_um',
        'clearance.gap',
        'refine',
      ].sort(),
    );
  });

  test('rules between objects are judged beside faults inside them', () => {
    const spec = bend((one) => {
      one.trees[0].inlet.pressure_mmHg = 10;
      one.trees[0].inlet.flow_mL_min = 'much';
      one.tissue.max_mm = [12, 0, 6];
      one.tissue.color = 'red';
    });
    expect(
      faultsOf(spec)
        .map((fault) => fault.where)
        .sort(),
    ).toEqual(['tissue.color', 'tissue.max_mm[1]', 'trees[0].inlet.flow_mL_min', 'trees[0].inlet.pressure_mmHg']);
  });

  test.each([Number.NaN, Number.POSITIVE_INFINITY, Number.NEGATIVE_INFINITY, null, '3', true, [], {}, 10n])(
    'a gap of %s',
    (gap) => {
      const faults = faultsOf(bend((one) => Object.assign(one, { clearance: { gap_um: gap } })));
      expect(faults).toHaveLength(1);
      expect(faults[0]?.where).toBe('clearance.gap_um');
      expect(faults[0]?.message).toContain('expected a number from 0 to 1000000 (um)');
    },
  );

  test('keys that hold undefined count as absent', () => {
    expect(
      faultsOf(bend((one) => Object.assign(one.clearance, { gap_um: undefined, gap_mm: 1, colour: undefined }))),
    ).toEqual([]);
  });

  test('a value that holds itself is refused, not followed for ever', () => {
    const loop: Bendable = { shape: 'union', parts: [] };
    loop.parts.push(loop);
    expect(faultsOf({ ...LEAST, tissue: loop })[0]?.code).toBe('too-deep');
  });

  test('more faults than anybody reads are counted', () => {
    const points = Array.from({ length: 2000 }, () => 'x');
    const faults = faultsOf(bend((one) => Object.assign(one.trees[0], { terminals: { points_mm: points } })));
    expect(faults).toHaveLength(501);
    expect(faults[500]?.message).toContain(`got ${2000 - 500} more faults`);
  });

  test('a doubled key is reported beside the faults of the rest', () => {
    const text = '{"seed": 1, "seed": 2, "tissue": {"shape": "cube"}, "trees": []}';
    try {
      parseSpec(text, 'a.json');
      expect.unreachable();
    } catch (error) {
      expect((error as InputError).faults.map((fault) => fault.where)).toEqual(['seed', 'tissue.shape', 'trees']);
    }
  });

  test('broken JSON names the file', () => {
    expect(() => parseSpec('{"a": ', 'runs/a.json')).toThrow(/^runs\/a\.json:1:7: got the end of the text/);
  });
});
