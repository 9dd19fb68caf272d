import { type Bendable, type BrokenSpec, bent, edited, withTissue } from './bend-spec.ts';

const SPHERE = { shape: 'sphere', center_mm: [0, 6, 3], radius_mm: 5 };

function nested(depth: number): Bendable {
  let shape: Bendable = SPHERE;
  for (let level = 0; level < depth; level++) shape = { shape: 'union', parts: [shape] };
  return shape;
}

/** A sound spec with this demand. */
const demanding = (name: string, where: string, demand: unknown, message?: RegExp): BrokenSpec =>
  bent(name, where, (spec) => Object.assign(spec.tissue, { demand }), message);

/** Tissue shapes. */
export const WRONG_TISSUE: BrokenSpec[] = [
  withTissue('tissue null', 'tissue', null),
  withTissue('tissue a word', 'tissue', 'box', /got "box"/),
  withTissue('tissue a list', 'tissue', [SPHERE]),
  withTissue('tissue without shape', 'tissue.shape', { min_mm: [0, 0, 0], max_mm: [1, 1, 1] }, /box, sphere/),
  withTissue('misspelt shape', 'tissue.shape', { shape: 'sphre' }, /nearest is sphere/),
  withTissue('shape a number', 'tissue.shape', { shape: 3 }),
  withTissue(
    'image',
    'tissue.shape',
    { shape: 'image', file: 'a.nrrd', label: 1 },
    /this version does not have it yet/,
  ),
  demanding(
    'demand a part',
    'tissue.demand',
    { ...SPHERE, weight: 2 },
    /an object, expected a list of 0 to 100 shapes/,
  ),
  demanding('demand an image', 'tissue.demand', { shape: 'image', file: 'a.nrrd' }, /an image.*does not have it yet/),
  demanding('image of demand', 'tissue.demand', { image: 'a.nrrd' }, /an image.*does not have it yet/),
  demanding(
    'image as a part of the demand',
    'tissue.demand[1].shape',
    [
      { ...SPHERE, weight: 2 },
      { shape: 'image', file: 'a.nrrd', weight: 1 },
    ],
    /labelled image as a part of the demand; this version does not have it yet/,
  ),
  demanding('demand without weight', 'tissue.demand[0].weight', [SPHERE], /got nothing, expected a number/),
  demanding('negative demand', 'tissue.demand[0].weight', [{ ...SPHERE, weight: -1 }], /got -1/),
  demanding(
    'faint demand',
    'tissue.demand[0].weight',
    [{ ...SPHERE, weight: 1e-4 }],
    /expected 0 or a number from 0.001/,
  ),
  demanding('demand beyond sense', 'tissue.demand[0].weight', [{ ...SPHERE, weight: 1001 }], /got 1001/),
  demanding('demand a word', 'tissue.demand[0].weight', [{ ...SPHERE, weight: 'high' }], /got "high"/),
  demanding('misspelt weight', 'tissue.demand[0].wieght', [{ ...SPHERE, weight: 2, wieght: 2 }], /nearest is weight/),
  demanding('fault in a part of the demand', 'tissue.demand[0].radius_mm', [{ ...SPHERE, radius_mm: -1, weight: 2 }]),
  demanding('weight in a part of a part', 'tissue.demand[0].parts[0].weight', [
    { shape: 'union', parts: [{ ...SPHERE, weight: 2 }], weight: 2 },
  ]),
  demanding(
    'too many parts',
    'tissue.demand',
    Array.from({ length: 101 }, () => ({ ...SPHERE, weight: 2 })),
    /a list of 101/,
  ),
  bent('box without max', 'tissue.max', (spec) => delete spec.tissue.max_mm, /max_m, max_mm or max_um/),
  bent('box of two numbers', 'tissue.max_mm', (spec) => Object.assign(spec.tissue, { max_mm: [1, 2] }), /three/),
  bent('box of four numbers', 'tissue.max_mm', (spec) => Object.assign(spec.tissue, { max_mm: [1, 2, 3, 4] }), /three/),
  bent('box of words', 'tissue.max_mm[1]', (spec) => Object.assign(spec.tissue, { max_mm: [1, '2', 3] }), /got "2"/),
  bent('box with a null', 'tissue.max_mm[2]', (spec) => Object.assign(spec.tissue, { max_mm: [1, 2, null] })),
  bent('box inside out', 'tissue.max_mm[0]', (spec) => Object.assign(spec.tissue, { max_mm: [-1, 12, 6] })),
  bent('flat box', 'tissue.max_mm[2]', (spec) => Object.assign(spec.tissue, { max_mm: [12, 12, 0] })),
  bent('box a kilometre wide', 'tissue.max_mm[0]', (spec) => Object.assign(spec.tissue, { max_mm: [1e6, 12, 6] })),
  edited('box wider than numbers go', 'tissue.max_mm[0]', '12,', '1e999,', /Infinity/),
  bent(
    'box without unit',
    'tissue.max',
    (spec) => {
      spec.tissue.max = spec.tissue.max_mm;
      delete spec.tissue.max_mm;
    },
    /without a unit/,
  ),
  bent(
    'box in inches',
    'tissue.max_inch',
    (spec) => {
      spec.tissue.max_inch = [1, 1, 1];
      delete spec.tissue.max_mm;
    },
    /"inch".*max_mm/,
  ),
  bent(
    'box in pascals',
    'tissue.max_Pa',
    (spec) => {
      spec.tissue.max_Pa = [1, 1, 1];
      delete spec.tissue.max_mm;
    },
    /unit of pressure.*max_mm/,
  ),
  bent(
    'box in two units',
    /^tissue\.max_/,
    (spec) => Object.assign(spec.tissue, { max_um: [12_000, 12_000, 6000] }),
    /beside/,
  ),
  withTissue('sphere without radius', 'tissue.radius', { shape: 'sphere', center_mm: [0, 0, 0] }),
  withTissue('sphere without centre', 'tissue.center', { shape: 'sphere', radius_mm: 5 }),
  withTissue('negative radius', 'tissue.radius_mm', { ...SPHERE, radius_mm: -2 }, /got -2/),
  withTissue('no radius', 'tissue.radius_mm', { ...SPHERE, radius_mm: 0 }),
  withTissue('radius below an atom', 'tissue.radius_um', { shape: 'sphere', center_mm: [0, 0, 0], radius_um: 1e-9 }),
  withTissue('radius a list', 'tissue.radius_mm', { ...SPHERE, radius_mm: [5] }, /a list of 1/),
  withTissue(
    'misspelt radius',
    'tissue.raduis_mm',
    { shape: 'sphere', center_mm: [0, 0, 0], raduis_mm: 5 },
    /nearest is radius_mm/,
  ),
  withTissue('radius in megametres', 'tissue.radius_Mm', { shape: 'sphere', center_mm: [0, 0, 0], radius_Mm: 5 }),
  withTissue('key of another shape', 'tissue.radii_mm', { ...SPHERE, radii_mm: [1, 1, 1] }, /unknown key/),
  withTissue('flat ellipsoid', 'tissue.radii_mm[1]', { shape: 'ellipsoid', center_mm: [0, 0, 0], radii_mm: [1, 0, 1] }),
  withTissue('ellipsoid of one radius', 'tissue.radii_mm', { shape: 'ellipsoid', center_mm: [0, 0, 0], radii_mm: 3 }),
  withTissue('cylinder of no length', 'tissue.to_mm', {
    shape: 'cylinder',
    from_mm: [1, 2, 3],
    to_mm: [1, 2, 3],
    radius_mm: 1,
  }),
  withTissue('cylinder with one end', 'tissue.to', { shape: 'cylinder', from_mm: [1, 2, 3], radius_mm: 1 }),
  withTissue('surface without file', 'tissue.file', { shape: 'surface' }),
  withTissue('surface of another kind', 'tissue.file', { shape: 'surface', file: 'a.step' }, /\.stl/),
  withTissue('surface file a number', 'tissue.file', { shape: 'surface', file: 5 }),
  withTissue('surface file with a null byte', 'tissue.file', { shape: 'surface', file: 'a\u0000.stl' }),
  withTissue('surface in inches', 'tissue.unit', { shape: 'surface', file: 'a.stl', unit: 'inch' }, /"mm"/),
  withTissue('union of nothing', 'tissue.parts', { shape: 'union', parts: [] }, /1 to 1000/),
  withTissue('union without parts', 'tissue.parts', { shape: 'union' }),
  withTissue('union of a shape', 'tissue.parts', { shape: 'union', parts: SPHERE }, /list/),
  withTissue('union of numbers', 'tissue.parts[0]', { shape: 'union', parts: [3] }),
  withTissue('fault in a part', 'tissue.parts[1].radius_mm', {
    shape: 'union',
    parts: [SPHERE, { ...SPHERE, radius_mm: -1 }],
  }),
  withTissue(
    'misspelt shape of a part',
    'tissue.parts[0].shape',
    { shape: 'intersection', parts: [{ shape: 'bix' }] },
    /nearest is box/,
  ),
  withTissue('difference without minus', 'tissue.minus', { shape: 'difference', of: SPHERE }),
  withTissue('difference of nothing', 'tissue.of', { shape: 'difference', minus: [SPHERE] }),
  withTissue('fault deep inside', 'tissue.minus[0].parts[0].center_mm[2]', {
    shape: 'difference',
    of: SPHERE,
    minus: [{ shape: 'union', parts: [{ ...SPHERE, center_mm: [0, 0, 'z'] }] }],
  }),
  withTissue('shapes without end', 'spec:1', nested(200), /deep/),
  bent('forbidden a shape', 'tissue.forbidden', (spec) => Object.assign(spec.tissue, { forbidden: SPHERE }), /list/),
  bent('fault in a forbidden part', 'tissue.forbidden[0].radius_mm', (spec) =>
    Object.assign(spec.tissue, { forbidden: [{ ...SPHERE, radius_mm: 1e9 }] }),
  ),
  withTissue('forbidden in a part', 'tissue.parts[0].forbidden', {
    shape: 'union',
    parts: [{ ...SPHERE, forbidden: [] }],
  }),
].map((one) => (one.where === 'spec:1' ? { ...one, where: /^spec:1:\d+$/ } : one));
