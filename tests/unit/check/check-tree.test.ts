import { describe, expect, test } from 'vitest';
import { checkTree } from '../../../src/check/check-tree.ts';
import type { CheckResult } from '../../../src/check/result.ts';
import { checkTable } from '../../../src/check/table.ts';
import { MMHG } from '../../../src/core/units.ts';
import type { Spec } from '../../../src/spec/types.ts';
import type { TreeRecord } from '../../../src/tree/forest.ts';
import { buildRecord, HAND_SPEC, HAND_TREE, type HandNode, leastPowerRadius } from '../../support/check-forests.ts';

const NONE = new Map();
const RADIUS = leastPowerRadius(HAND_SPEC);

function broken(result: CheckResult): string[] {
  return result.promises.filter((promise) => promise.held === false).map((promise) => promise.id);
}

function unchecked(result: CheckResult): string[] {
  return result.promises.filter((promise) => promise.held === null).map((promise) => promise.id);
}

function moved(row: number, at: readonly [number, number, number]): HandNode[] {
  return HAND_TREE.map((node, k) => (k === row ? { ...node, at } : node));
}

describe('a tree as asked', () => {
  const good = buildRecord(HAND_TREE, HAND_SPEC);

  test('keeps every promise', () => {
    const { pumping, maintenance } = cost(good);
    const claimed = { pumping_W: pumping, maintenance_W: maintenance, total_W: pumping + maintenance };
    const result = checkTree(good, HAND_SPEC, NONE, { claimed });
    expect(result.findings).toEqual([]);
    expect(broken(result)).toEqual([]);
    expect(unchecked(result)).toEqual(['terminal-pressure']);
    expect(result.held).toBe(true);
    expect(result.warnings).toEqual([]);
    for (const promise of result.promises) if (promise.held) expect(promise.checked, promise.id).toBeGreaterThan(0);
  });

  test('says what it cannot check without a spec', () => {
    const result = checkTree(good, null, NONE);
    expect(result.held).toBe(true);
    expect(unchecked(result)).toEqual([
      'containment',
      'junction-law',
      'sizing',
      'terminal-pressure',
      'inlet-flow',
      'terminal-flow',
      'terminals',
      'reynolds',
      'cost',
    ]);
  });

  test('names the stub that is exempt', () => {
    const result = checkTree(good, HAND_SPEC, NONE);
    const containment = result.promises.find((promise) => promise.id === 'containment')!;
    expect(containment.note).toMatch(/inlet stub, the first [\d.]+ µm of supply/);
    // All eight vessels are looked at, the first from where it is as deep as its radius.
    expect(containment.checked).toBe(8);
  });

  // The cost that Murray's optimum gives is K Q^(2/3) a metre, K = 3/2 π^(1/3) (16 μ)^(1/3) m^(2/3): Murray (1926), from memory, re-derived.
  test('recomputes the cost of the optimum', () => {
    const { viscosity, maintenance } = HAND_SPEC.blood;
    const k = 1.5 * Math.cbrt(Math.PI) * Math.cbrt(16 * viscosity.value) * Math.cbrt(maintenance * maintenance);
    const result = checkTree(good, HAND_SPEC, NONE);
    let wanted = 0;
    for (let i = 1; i < good.forest.count; i++) {
      const q = Math.cbrt(good.forest.flow[i]!);
      wanted += k * q * q * lengthOf(good, i);
    }
    expect(result.recomputed.total_W! / wanted).toBeCloseTo(1, 12);
    expect(result.recomputed.maintenance_W! / result.recomputed.pumping_W!).toBeCloseTo(2, 12);
  });
});

describe('one planted fault breaks its promise and names the vessel', () => {
  const cases: [string, () => TreeRecord, Spec, string[], string][] = [
    [
      'a terminal outside the tissue',
      () => buildRecord(moved(4, [14, 19.95, 12]), HAND_SPEC),
      HAND_SPEC,
      ['containment'],
      'supply:3',
    ],
    [
      // 0.05 mm from the axis of vessel 1 but 1 mm beyond its other end: only vessel 6 and vessel 1 are near.
      'two vessels that cross',
      () => buildRecord(moved(7, [7, 12.5, 10]), { ...HAND_SPEC, junctions: { minAngle: 0 } }),
      { ...HAND_SPEC, junctions: { minAngle: 0 } },
      ['clearance'],
      'supply:1',
    ],
    [
      'a gap that is not kept',
      () => buildRecord(HAND_TREE, HAND_SPEC),
      { ...HAND_SPEC, clearance: { gap: 0.004 } },
      ['clearance'],
      'supply:1',
    ],
    [
      'an angle that is too sharp',
      () => buildRecord(HAND_TREE, HAND_SPEC),
      { ...HAND_SPEC, junctions: { minAngle: 1.3 } },
      ['junction-angle'],
      'supply:6',
    ],
    [
      'a vessel too short for its junctions',
      () => buildRecord(moved(4, [11.2, 15.2, 10.1]), HAND_SPEC),
      HAND_SPEC,
      ['junction-separation', 'vessel-length'],
      'supply:3',
    ],
    [
      'a radius that breaks law and sizing',
      () => buildRecord(HAND_TREE, HAND_SPEC, (flow, row) => RADIUS(flow) * (row === 7 ? 1.000001 : 1)),
      HAND_SPEC,
      ['junction-law', 'sizing'],
      'supply:5',
    ],
    [
      'all radii scaled',
      () => buildRecord(HAND_TREE, HAND_SPEC, (flow) => RADIUS(flow) * 1.000001),
      HAND_SPEC,
      ['sizing'],
      'supply:0',
    ],
    [
      'blood lost at a node',
      () =>
        buildRecord(HAND_TREE, HAND_SPEC, RADIUS, ({ flow, radius }) => {
          flow[2]! *= 1 + 1e-8;
          radius[2] = RADIUS(flow[2]!);
        }),
      HAND_SPEC,
      ['junction-law', 'conservation'],
      'supply:0',
    ],
    [
      'another inlet flow',
      () => buildRecord(HAND_TREE, HAND_SPEC),
      withTree({ inlet: { ...HAND_SPEC.trees[0]!.inlet, flow: 1.1e-6 / 60 } }),
      ['inlet-flow'],
      'supply:0',
    ],
    [
      'unequal terminals',
      () =>
        buildRecord(
          HAND_TREE.map((node, row) =>
            row === 7 ? { ...node, share: 0.26 } : row === 8 ? { ...node, share: 0.24 } : node,
          ),
          HAND_SPEC,
        ),
      HAND_SPEC,
      ['terminal-flow'],
      'supply:6',
    ],
    [
      'a terminal that is missing',
      () => buildRecord(HAND_TREE, HAND_SPEC),
      withTree({ terminals: { by: 'count', count: 5, pressure: null } }),
      ['terminals'],
      'supply',
    ],
    ['a wrong pressure', () => spoilt((c) => (c.pressure[5]! += 1e-5)), HAND_SPEC, ['pressure'], 'supply:4'],
    ['a wrong transit', () => spoilt((c) => (c.transit[5]! *= 1.001)), HAND_SPEC, ['transit'], 'supply:4'],
    ['a wrong viscosity', () => spoilt((c) => (c.viscosity[5]! *= 1.001)), HAND_SPEC, ['viscosity'], 'supply:4'],
    ['a wrong velocity', () => spoilt((c) => (c.velocity[5]! *= 1.001)), HAND_SPEC, ['velocity'], 'supply:4'],
    ['a wrong wall shear', () => spoilt((c) => (c.wallShear[5]! *= 1.001)), HAND_SPEC, ['wall-shear'], 'supply:4'],
    ['a wrong Reynolds number', () => spoilt((c) => (c.reynolds[5]! *= 1.001)), HAND_SPEC, ['reynolds'], 'supply:4'],
    ['a NaN', () => spoilt((c) => (c.velocity[5] = Number.NaN)), HAND_SPEC, ['velocity'], 'supply:4'],
    ['a wrong order', () => spoilt((c) => (c.order[2] = 1)), HAND_SPEC, ['orders'], 'supply:1'],
    [
      'rows out of preorder',
      () =>
        buildRecord(
          // The lower branch is listed before the bend's terminals: parents come first, subtrees are torn apart.
          [0, 1, 2, 3, 6, 4, 5, 7, 8].map((row) => ({
            ...HAND_TREE[row]!,
            parent: [-1, 0, 1, 2, 3, 3, 1, 4, 4][row]!,
          })),
          HAND_SPEC,
        ),
      HAND_SPEC,
      ['structure'],
      'supply:4',
    ],
  ];

  test.each(cases)('%s', (_, make, spec, ids, vessel) => {
    const result = checkTree(make(), spec, NONE);
    expect(broken(result)).toEqual(ids);
    expect(result.held).toBe(false);
    expect(result.findings[0]!.vessel).toBe(vessel);
    expect(checkTable(result)).toContain(`${vessel}: `);
  });

  test('rows that hang nowhere stop the rest', () => {
    const result = checkTree(
      spoilt((c) => (c.parent[5] = 8)),
      HAND_SPEC,
      NONE,
    );
    expect(broken(result)).toEqual(['structure']);
    expect(unchecked(result).length).toBe(result.promises.length - 1);
    expect(result.findings[0]!.message).toContain('hangs from row 8');
  });

  test('a report that claims another cost', () => {
    const good = buildRecord(HAND_TREE, HAND_SPEC);
    const { pumping, maintenance } = cost(good);
    const claimed = { pumping_W: pumping * 1.00001, maintenance_W: maintenance, total_W: pumping + maintenance };
    const result = checkTree(good, HAND_SPEC, NONE, { claimed });
    expect(broken(result)).toEqual(['cost']);
    expect(result.findings.map((finding) => finding.vessel)).toEqual(['pumping_W']);
  });

  test('findings are capped and counted', () => {
    const record = buildRecord(HAND_TREE, HAND_SPEC, (flow) => RADIUS(flow) * 1.01);
    const result = checkTree(record, HAND_SPEC, NONE, { cap: 3 });
    const sizing = result.promises.find((promise) => promise.id === 'sizing')!;
    expect(sizing.failures).toBe(8);
    expect(result.findings.length).toBe(3);
    expect(checkTable(result)).toContain('8 findings, first 3 listed');
  });
});

describe('explicit points', () => {
  const points = [8, 4, 7, 5].map((row) => HAND_TREE[row]!.at.map((x) => x / 1000) as [number, number, number]);
  const spec = withTree({ terminals: { by: 'points', points, share: [0.25, 0.25, 0.25, 0.25], pressure: null } });

  test('all hit', () => {
    expect(broken(checkTree(buildRecord(HAND_TREE, HAND_SPEC), spec, NONE))).toEqual([]);
  });

  test('one missed by 1 µm', () => {
    const result = checkTree(buildRecord(moved(7, [14, 6.001, 13]), HAND_SPEC), spec, NONE);
    expect(broken(result)).toEqual(['terminals']);
    expect(result.findings.map((finding) => finding.vessel)).toEqual(['supply:6', 'supply']);
    expect(result.findings[1]!.message).toBe('point 2 (14.0000, 6.00000, 13.0000) mm is not reached');
  });
});

// Worked trees of constrained constructive optimisation, two equal terminals, 500 mL/min, 3.6 mPa·s, drop 40 mmHg
// (formulas from memory, verified numerically with another program): the check must agree with them to the digits given.
describe('pressure-matched', () => {
  const cases = [
    [3, 0.9907464235, 0.7131060233, 0.8480307567],
    [2.55, 1.013219412, 0.7012942833, 0.8339841514],
  ] as const;
  test.each(cases)('exponent %d', (exponent, r0, r1, r2) => {
    const nodes: HandNode[] = [
      { parent: -1, at: [0, 0, 0] },
      { parent: 0, at: [30, 0, 0] },
      { parent: 1, at: [30, 20, 0], share: 0.5 },
      { parent: 1, at: [30, -40, 0], share: 0.5 },
    ];
    const spec: Spec = {
      ...HAND_SPEC,
      tissue: { shape: 'box', min: [-0.1, -0.1, -0.1], max: [0.1, 0.1, 0.1] },
      trees: [
        {
          ...HAND_SPEC.trees[0]!,
          inlet: { position: [0, 0, 0], direction: null, pressure: 100 * MMHG, flow: 500e-6 / 60 },
          terminals: { by: 'count', count: 2, pressure: 60 * MMHG },
        },
      ],
      blood: { viscosity: { law: 'constant', value: 0.0036 }, density: 1060, maintenance: 600 },
      sizing: { rule: 'pressure-matched', exponent },
    };
    const radii = [r0, r0, r1, r2].map((r) => r / 1000);
    const result = checkTree(
      buildRecord(nodes, spec, (_, row) => radii[row]!),
      spec,
      NONE,
    );
    expect(broken(result)).toEqual([]);
    expect(unchecked(result)).toEqual(['sizing', 'cost']);
    // Re = 2ρQ/(πrμ) of the trunk: above 1000, below 2000.
    expect(result.warnings).toEqual([]);

    const off = checkTree(
      buildRecord(nodes, spec, (_, row) => radii[row]! * (1 + 1e-5)),
      spec,
      NONE,
    );
    expect(broken(off)).toEqual(['terminal-pressure']);
    expect(off.promises.find((promise) => promise.id === 'terminal-pressure')!.failures).toBe(2);
  });
});

describe('junction-exponent', () => {
  const flow = HAND_SPEC.trees[0]!.inlet.flow;
  const rule = (exponent: number, inlet: number) => (q: number) => inlet * Math.exp(Math.log(q / flow) / exponent);
  const spec = (scale: Extract<Spec['sizing'], { rule: 'junction-exponent' }>['scale']): Spec => ({
    ...HAND_SPEC,
    sizing: { rule: 'junction-exponent', exponent: 2.5, scale },
  });
  const record = buildRecord(HAND_TREE, HAND_SPEC, rule(2.5, 3e-4));

  test('by the inlet radius', () => {
    expect(broken(checkTree(record, spec({ by: 'inlet-radius', radius: 3e-4 }), NONE))).toEqual([]);
    expect(broken(checkTree(record, spec({ by: 'inlet-radius', radius: 3.01e-4 }), NONE))).toEqual(['sizing']);
  });

  test('by the terminal radius', () => {
    const radius = 3e-4 * Math.exp(Math.log(0.25) / 2.5);
    expect(broken(checkTree(record, spec({ by: 'terminal-radius', radius }), NONE))).toEqual([]);
    expect(broken(checkTree(record, spec({ by: 'terminal-radius', radius: radius * 1.01 }), NONE))).toEqual(['sizing']);
  });

  test('by the mean terminal pressure', () => {
    const leaves = [4, 5, 7, 8];
    const mean = leaves.reduce((sum, row) => sum + 0.25 * record.field!.pressure[row]!, 0);
    const asked = (pressure: number): Spec => ({
      ...spec({ by: 'mean-pressure' }),
      trees: withTree({ terminals: { by: 'count', count: 4, pressure } }).trees,
    });
    expect(broken(checkTree(record, asked(mean), NONE))).toEqual([]);
    expect(broken(checkTree(record, asked(mean + 0.01), NONE))).toEqual(['sizing']);
  });

  test('another exponent breaks the law', () => {
    const other: Spec = {
      ...HAND_SPEC,
      sizing: { ...spec({ by: 'inlet-radius', radius: 3e-4 }).sizing, exponent: 2.7 } as Spec['sizing'],
    };
    expect(broken(checkTree(record, other, NONE))).toEqual(['junction-law', 'sizing']);
  });
});

test('fast flow is a warning, not a finding', () => {
  const spec: Spec = { ...HAND_SPEC, blood: { ...HAND_SPEC.blood, density: 1e6 } };
  const result = checkTree(buildRecord(HAND_TREE, spec), spec, NONE);
  expect(result.held).toBe(true);
  expect(result.warnings[0]!.vessel).toBe('supply:0');
  expect(result.warnings[0]!.limit).toBe(2000);
});

test('a draining tree has its pressure rise away from the root', () => {
  const spec: Spec = { ...HAND_SPEC, trees: [{ ...HAND_SPEC.trees[0]!, kind: 'drain' }] };
  const record = buildRecord(HAND_TREE, spec);
  expect(record.field!.pressure[8]).toBeGreaterThan(record.field!.pressure[0]!);
  expect(broken(checkTree(record, spec, NONE))).toEqual([]);
});

function withTree(change: Partial<Spec['trees'][number]>): Spec {
  return { ...HAND_SPEC, trees: [{ ...HAND_SPEC.trees[0]!, ...change }] };
}

function spoilt(spoil: NonNullable<Parameters<typeof buildRecord>[4]>): TreeRecord {
  return buildRecord(HAND_TREE, HAND_SPEC, RADIUS, () => {}, spoil);
}

function lengthOf(record: TreeRecord, row: number): number {
  const { position, parent } = record.forest;
  const along = (k: number) => position[3 * row + k]! - position[3 * parent[row]! + k]!;
  return Math.hypot(along(0), along(1), along(2));
}

function cost(record: TreeRecord): { pumping: number; maintenance: number } {
  const { count, radius, flow } = record.forest;
  let pumping = 0;
  let maintenance = 0;
  for (let i = 1; i < count; i++) {
    const r = radius[i]!;
    pumping += (8 * 0.003 * lengthOf(record, i) * flow[i]! * flow[i]!) / (Math.PI * r * r * r * r);
    maintenance += 600 * Math.PI * r * r * lengthOf(record, i);
  }
  return { pumping, maintenance };
}
