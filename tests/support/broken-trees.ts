import { type BrokenSpec, bent } from './bend-spec.ts';

/** Trees, inlets and terminals. */
export const WRONG_TREES: BrokenSpec[] = [
  bent('no tree', 'trees', (spec) => Object.assign(spec, { trees: [] }), /1 to 100/),
  bent('one tree, no list', 'trees', (spec) => Object.assign(spec, { trees: spec.trees[0] }), /list/),
  bent('too many trees', 'trees', (spec) => Object.assign(spec, { trees: new Array(101).fill(spec.trees[0]) }), /100/),
  bent('tree a word', 'trees[0]', (spec) => Object.assign(spec, { trees: ['supply'] })),
  bent(
    'tree name with a hyphen',
    'trees[0].name',
    (spec) => Object.assign(spec.trees[0], { name: 'left-artery' }),
    /letter/,
  ),
  bent('tree name that starts with a digit', 'trees[0].name', (spec) => Object.assign(spec.trees[0], { name: '1st' })),
  bent('tree name empty', 'trees[0].name', (spec) => Object.assign(spec.trees[0], { name: '' })),
  bent('same tree twice', 'trees[1].name', (spec) => spec.trees.push(spec.trees[0]), /trees\[0\]/),
  bent('name of a default', 'trees[1].name', (spec) => spec.trees.push({ ...spec.trees[0], name: 'supply' })),
  bent(
    'strange kind',
    'trees[0].kind',
    (spec) => Object.assign(spec.trees[0], { kind: 'artery' }),
    /"supply" or "drain"/,
  ),
  bent('trunk', 'trees[0].trunk', (spec) => Object.assign(spec.trees[0], { trunk: 'a.vtp' }), /does not have it yet/),
  bent('misspelt inlet', 'trees[0].inlett', (spec) => Object.assign(spec.trees[0], { inlett: {} }), /nearest is inlet/),
  bent('no inlet', 'trees[0].inlet', (spec) => delete spec.trees[0].inlet),
  bent('inlet a point', 'trees[0].inlet', (spec) => Object.assign(spec.trees[0], { inlet: [0, 0, 0] })),
  bent('inlet nowhere', 'trees[0].inlet.position', (spec) => delete spec.trees[0].inlet.position_mm),
  bent('no flow', 'trees[0].inlet.flow', (spec) => delete spec.trees[0].inlet.flow_mL_min, /flow_m3_s/),
  bent('flow of 0', 'trees[0].inlet.flow_mL_min', (spec) => Object.assign(spec.trees[0].inlet, { flow_mL_min: 0 })),
  bent(
    'flow backwards',
    'trees[0].inlet.flow_mL_min',
    (spec) => Object.assign(spec.trees[0].inlet, { flow_mL_min: -1 }),
    /got -1/,
  ),
  bent('flow of a river', 'trees[0].inlet.flow_mL_min', (spec) =>
    Object.assign(spec.trees[0].inlet, { flow_mL_min: 1e12 }),
  ),
  bent('flow a word', 'trees[0].inlet.flow_mL_min', (spec) =>
    Object.assign(spec.trees[0].inlet, { flow_mL_min: '1.2' }),
  ),
  bent(
    'flow in litres',
    'trees[0].inlet.flow_L_min',
    (spec) => {
      spec.trees[0].inlet.flow_L_min = 1;
      delete spec.trees[0].inlet.flow_mL_min;
    },
    /"L_min".*flow_mL_min/,
  ),
  bent(
    'flow as pressure',
    'trees[0].inlet.flow_mmHg',
    (spec) => Object.assign(spec.trees[0].inlet, { flow_mmHg: 1 }),
    /unit of pressure/,
  ),
  bent(
    'pressure without unit',
    'trees[0].inlet.pressure',
    (spec) => Object.assign(spec.trees[0].inlet, { pressure: 1 }),
    /without a unit/,
  ),
  bent(
    'pressure in bars',
    'trees[0].inlet.pressure_bar',
    (spec) => Object.assign(spec.trees[0].inlet, { pressure_bar: 1 }),
    /"bar"/,
  ),
  bent(
    'pressure twice',
    /^trees\[0\]\.inlet\.pressure_/,
    (spec) => Object.assign(spec.trees[0].inlet, { pressure_kPa: 8 }),
    /beside/,
  ),
  bent('pressure of a star', 'trees[0].inlet.pressure_mmHg', (spec) =>
    Object.assign(spec.trees[0].inlet, { pressure_mmHg: 1e15 }),
  ),
  bent(
    'inlet below terminals',
    'trees[0].inlet.pressure_mmHg',
    (spec) => Object.assign(spec.trees[0].inlet, { pressure_mmHg: 10 }),
    /above/,
  ),
  bent(
    'inlet below the default',
    'trees[0].inlet.pressure_mmHg',
    (spec) => {
      spec.trees[0].inlet.pressure_mmHg = 25;
      delete spec.trees[0].terminals.pressure_mmHg;
    },
    /default/,
  ),
  bent(
    'terminals above the default',
    'trees[0].inlet.pressure',
    (spec) => {
      delete spec.trees[0].inlet.pressure_mmHg;
      spec.trees[0].terminals.pressure_mmHg = 150;
    },
    /default/,
  ),
  bent(
    'drain above its terminals',
    'trees[0].inlet.pressure_mmHg',
    (spec) => Object.assign(spec.trees[0], { kind: 'drain' }),
    /below/,
  ),
  bent('direction of nothing', 'trees[0].inlet.direction', (spec) =>
    Object.assign(spec.trees[0].inlet, { direction: [0, 0, 0] }),
  ),
  bent('direction in a plane', 'trees[0].inlet.direction', (spec) =>
    Object.assign(spec.trees[0].inlet, { direction: [1, 0] }),
  ),
  bent('direction a word', 'trees[0].inlet.direction', (spec) =>
    Object.assign(spec.trees[0].inlet, { direction: 'x' }),
  ),
  bent('direction with a word', 'trees[0].inlet.direction[0]', (spec) =>
    Object.assign(spec.trees[0].inlet, { direction: ['x', 0, 0] }),
  ),
  bent('no terminals', 'trees[0].terminals', (spec) => delete spec.trees[0].terminals),
  bent('terminals a number', 'trees[0].terminals', (spec) => Object.assign(spec.trees[0], { terminals: 2000 })),
  bent(
    'terminals without a way',
    'trees[0].terminals',
    (spec) => delete spec.trees[0].terminals.count,
    /count, spacing_um and points_mm/,
  ),
  bent(
    'count and spacing',
    'trees[0].terminals.spacing_um',
    (spec) => Object.assign(spec.trees[0].terminals, { spacing_um: 300 }),
    /beside count/,
  ),
  bent(
    'count and points',
    'trees[0].terminals.points_mm',
    (spec) => Object.assign(spec.trees[0].terminals, { points_mm: [[1, 1, 1]] }),
    /beside count/,
  ),
  bent('count of 0', 'trees[0].terminals.count', (spec) => Object.assign(spec.trees[0].terminals, { count: 0 })),
  bent('negative count', 'trees[0].terminals.count', (spec) => Object.assign(spec.trees[0].terminals, { count: -5 })),
  bent('half a terminal', 'trees[0].terminals.count', (spec) => Object.assign(spec.trees[0].terminals, { count: 2.5 })),
  bent(
    'too many terminals',
    'trees[0].terminals.count',
    (spec) => Object.assign(spec.trees[0].terminals, { count: 1e9 }),
    /20000000/,
  ),
  bent(
    'count a word',
    'trees[0].terminals.count',
    (spec) => Object.assign(spec.trees[0].terminals, { count: '20' }),
    /got "20"/,
  ),
  bent(
    'misspelt count',
    'trees[0].terminals.cuont',
    (spec) => {
      spec.trees[0].terminals.cuont = 20;
      delete spec.trees[0].terminals.count;
    },
    /nearest is count/,
  ),
  bent('spacing of 0', 'trees[0].terminals.spacing_um', (spec) =>
    Object.assign(spec.trees[0], { terminals: { spacing_um: 0 } }),
  ),
  bent(
    'spacing without unit',
    'trees[0].terminals.spacing',
    (spec) => Object.assign(spec.trees[0], { terminals: { spacing: 300 } }),
    /spacing_um/,
  ),
  bent(
    'too few points',
    'trees[0].terminals.points_mm',
    (spec) => Object.assign(spec.trees[0], { terminals: { points_mm: [] } }),
    /1 to/,
  ),
  bent('points in a plane', 'trees[0].terminals.points_mm[1]', (spec) =>
    Object.assign(spec.trees[0], {
      terminals: {
        points_mm: [
          [1, 2, 3],
          [1, 2],
        ],
      },
    }),
  ),
  bent('one flat list of points', 'trees[0].terminals.points_mm[0]', (spec) =>
    Object.assign(spec.trees[0], { terminals: { points_mm: [1, 2, 3] } }),
  ),
  bent('points a word', 'trees[0].terminals.points_mm', (spec) =>
    Object.assign(spec.trees[0], { terminals: { points_mm: 'a.csv' } }),
  ),
  bent(
    'same point twice',
    'trees[0].terminals.points_mm[2]',
    (spec) =>
      Object.assign(spec.trees[0], {
        terminals: {
          points_mm: [
            [1, 2, 3],
            [2, 2, 3],
            [1, 2, 3],
          ],
        },
      }),
    /points_mm\[0\]/,
  ),
  bent(
    'point at the inlet',
    'trees[0].terminals.points_mm[0]',
    (spec) => Object.assign(spec.trees[0], { terminals: { points_mm: [[0, 6, 3]] } }),
    /inlet/,
  ),
  bent(
    'too few shares',
    'trees[0].terminals.flow_share',
    (spec) =>
      Object.assign(spec.trees[0], {
        terminals: {
          points_mm: [
            [1, 2, 3],
            [2, 2, 3],
          ],
          flow_share: [1],
        },
      }),
    /expected 2/,
  ),
  bent('negative share', 'trees[0].terminals.flow_share[1]', (spec) =>
    Object.assign(spec.trees[0], {
      terminals: {
        points_mm: [
          [1, 2, 3],
          [2, 2, 3],
        ],
        flow_share: [1, -1],
      },
    }),
  ),
  bent(
    'sharing by an unknown rule',
    'trees[0].terminals.flow_share',
    (spec) => Object.assign(spec.trees[0].terminals, { flow_share: 'teritory' }),
    /got "teritory", expected "equal" or "territory"/,
  ),
  bent(
    'share a word in a list',
    'trees[0].terminals.flow_share[0]',
    (spec) => Object.assign(spec.trees[0], { terminals: { points_mm: [[1, 2, 3]], flow_share: ['territory'] } }),
    /got "territory", expected a number/,
  ),
  bent(
    'sharing a number',
    'trees[0].terminals.flow_share',
    (spec) => Object.assign(spec.trees[0].terminals, { flow_share: 1 }),
    /got 1, expected "equal", "territory" or a list/,
  ),
  bent('share of 0', 'trees[0].terminals.flow_share[0]', (spec) =>
    Object.assign(spec.trees[0], { terminals: { points_mm: [[1, 2, 3]], flow_share: [0] } }),
  ),
  bent(
    'share without points',
    'trees[0].terminals.flow_share',
    (spec) => Object.assign(spec.trees[0].terminals, { flow_share: [1] }),
    /points/,
  ),
  bent(
    'share misread as a flow',
    'trees[0].terminals.flow_mL_min',
    (spec) => Object.assign(spec.trees[0].terminals, { flow_mL_min: 1 }),
    /unknown key/,
  ),
];
