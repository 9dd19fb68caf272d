import { z } from 'zod';
import { amount, isObject, peekKey, peekTriple, type Raw, triple, type ValueField, value } from './fields.ts';
import { describeValue, listWords, NOT_BUILT, nearestWord } from './got.ts';
import type { Fields } from './keys.ts';
import { type Report, record } from './record.ts';
import { plain } from './text-schema.ts';
import type { Shape } from './types.ts';

/** m; a coordinate, and an extent of a shape or a vessel. */
export const COORDINATE = { min: -10, max: 10 };
export const EXTENT = { min: 1e-7, max: 10 };
const MOST_PARTS = 1000;
/** Parts of different demand. */
const MOST_DEMANDS = 100;
/** Weights beside 0; wider apart, and the spacing of terminals would differ more than a hundredfold. */
const WEIGHT = { min: 1e-3, max: 1e3 };

export const SHAPE_NAMES = [
  'box',
  'sphere',
  'ellipsoid',
  'cylinder',
  'surface',
  'union',
  'intersection',
  'difference',
] as const;

const point = (doc: string) => triple('length', { range: COORDINATE, doc });
const extents = (doc: string) => triple('length', { range: EXTENT, doc });

function shapeKey<N extends string>(name: N): ValueField<N> {
  return value(z.literal(name), { doc: 'The kind of shape.', range: `"${name}"` }) as ValueField<N>;
}

const part: z.ZodType<Shape> = z.lazy(() => PART).meta({ id: 'part' });

function partList(doc: string): ValueField<Shape[]> {
  const error = (issue: { readonly input?: unknown }) =>
    `got ${describeValue(issue.input)}, expected a list of 1 to ${MOST_PARTS} shapes`;
  const schema = z.array(part, { error }).min(1, { error }).max(MOST_PARTS, { error });
  return value(schema, { doc, range: `1 to ${MOST_PARTS} shapes` });
}

/** The keys of every shape. */
export const SHAPE_FIELDS = {
  box: {
    shape: shapeKey('box'),
    min: point('Corner of least x, y and z.'),
    max: point('Corner of greatest x, y and z, each at least 0.1 um above `min`.'),
  },
  sphere: {
    shape: shapeKey('sphere'),
    center: point('Centre.'),
    radius: amount('length', { range: EXTENT, doc: 'Radius.' }),
  },
  ellipsoid: {
    shape: shapeKey('ellipsoid'),
    center: point('Centre.'),
    radii: extents('Half axes along x, y and z.'),
  },
  cylinder: {
    shape: shapeKey('cylinder'),
    from: point('Centre of one end face.'),
    to: point('Centre of the other end face, at least 0.1 um away.'),
    radius: amount('length', { range: EXTENT, doc: 'Radius.' }),
  },
  surface: {
    shape: shapeKey('surface'),
    file: value(
      z
        .string({ error: (issue) => `got ${describeValue(issue.input)}, expected the path of an STL, PLY or OBJ file` })
        .regex(/^\P{Cc}{1,1000}\.([sS][tT][lL]|[pP][lL][yY]|[oO][bB][jJ])$/u, {
          error: (issue) => `got ${describeValue(issue.input)}, expected a path that ends in .stl, .ply or .obj`,
        }),
      { doc: 'Closed triangle surface, relative to the spec.', range: '.stl, .ply or .obj' },
    ),
    unit: value(
      z
        .enum(['m', 'mm', 'um'], { error: (issue) => `got ${describeValue(issue.input)}, expected "m", "mm" or "um"` })
        .default('mm'),
      { doc: 'What one of the file’s numbers means.', range: '"m", "mm" or "um"', fallback: '"mm"' },
    ),
  },
  union: { shape: shapeKey('union'), parts: partList('Shapes; the tissue is what lies in any of them.') },
  intersection: { shape: shapeKey('intersection'), parts: partList('Shapes; the tissue is what lies in all of them.') },
  difference: {
    shape: shapeKey('difference'),
    of: value(part, { doc: 'The shape that is cut.', range: 'a shape' }),
    minus: partList('Shapes that are taken away.'),
  },
} as const;

const weightError = (issue: { readonly input?: unknown }) =>
  `got ${describeValue(issue.input)}, expected 0 or a number from ${WEIGHT.min} to ${WEIGHT.max}`;

/** What a part of the tissue's demand says beside its shape. */
export const DEMAND_FIELDS = {
  weight: value(
    plain(0, WEIGHT.max).refine((weight) => weight === 0 || weight >= WEIGHT.min, {
      error: weightError,
      params: { code: 'out-of-range' },
    }),
    {
      doc: 'Relative perfusion in this part of the tissue: that of the last part that holds a point, 1 where none does.',
      range: `0, or ${WEIGHT.min} to ${WEIGHT.max}`,
    },
  ),
} as const;

/** A part of the tissue's demand as the schema gives it. */
type Weighted = Shape & { readonly weight: number };

const weighted: z.ZodType<Weighted> = z.lazy(() => WEIGHTED).meta({ id: 'demandPart' });

function demandError(issue: { readonly input?: unknown }): string {
  const { input } = issue;
  const wanted = `expected a list of 0 to ${MOST_DEMANDS} shapes with weights`;
  const image = isObject(input) && (input.shape === 'image' || input.image !== undefined);
  return image
    ? `got an image, ${wanted}: demand from an image; ${NOT_BUILT}`
    : `got ${describeValue(input)}, ${wanted}`;
}

/** What the whole tissue may say beside its shape. */
export const TISSUE_FIELDS = {
  forbidden: value(
    z
      .array(part, { error: (issue) => `got ${describeValue(issue.input)}, expected a list of shapes` })
      .max(MOST_PARTS, { error: `expected at most ${MOST_PARTS} shapes` })
      .default([]),
    { doc: 'Shapes that vessels keep out of.', range: `0 to ${MOST_PARTS} shapes`, fallback: 'none' },
  ),
  demand: value(z.array(weighted, { error: demandError }).max(MOST_DEMANDS, { error: demandError }).default([]), {
    doc: 'Parts with a perfusion of their own, relative to 1 in the rest; terminals stand denser where it is higher.',
    range: `0 to ${MOST_DEMANDS} shapes, each with a \`weight\``,
    fallback: 'none: the same everywhere',
  }),
} as const;

function judgeBox(raw: Raw, report: Report): void {
  const min = peekTriple(raw, 'min', 'length');
  const max = peekTriple(raw, 'max', 'length');
  const key = peekKey(raw, 'max', 'length')?.key ?? 'max';
  if (!min || !max) return;
  for (const axis of [0, 1, 2] as const) {
    if (max[axis] - min[axis] >= EXTENT.min) continue;
    const got = `got ${max[axis]} m where min has ${min[axis]} m`;
    report([key, axis], 'out-of-range', `${got}, expected at least ${EXTENT.min} m more`);
  }
}

function judgeCylinder(raw: Raw, report: Report): void {
  const from = peekTriple(raw, 'from', 'length');
  const to = peekTriple(raw, 'to', 'length');
  const key = peekKey(raw, 'to', 'length')?.key ?? 'to';
  if (!from || !to) return;
  const length = Math.hypot(to[0] - from[0], to[1] - from[1], to[2] - from[2]);
  if (length >= EXTENT.min) return;
  report([key], 'out-of-range', `got a point ${length} m from the other end, expected at least ${EXTENT.min} m`);
}

function anyShape<E extends Fields>(extra: E, use = 'as tissue') {
  const options = [
    record('a box', { ...SHAPE_FIELDS.box, ...extra }, judgeBox),
    record('a sphere', { ...SHAPE_FIELDS.sphere, ...extra }),
    record('an ellipsoid', { ...SHAPE_FIELDS.ellipsoid, ...extra }),
    record('a cylinder', { ...SHAPE_FIELDS.cylinder, ...extra }, judgeCylinder),
    record('a surface', { ...SHAPE_FIELDS.surface, ...extra }),
    record('a union', { ...SHAPE_FIELDS.union, ...extra }),
    record('an intersection', { ...SHAPE_FIELDS.intersection, ...extra }),
    record('a difference', { ...SHAPE_FIELDS.difference, ...extra }),
  ] as const;
  return z.discriminatedUnion('shape', options as unknown as Discriminable, { error: shapeErrorOf(use) });
}

// The library's types cannot see the literal of `shape` through a transform; its code can.
type Discriminable = Parameters<typeof z.discriminatedUnion>[1];

const shapeErrorOf = (use: string) => (issue: { readonly code?: string; readonly input?: unknown }) => {
  const { input } = issue;
  if (issue.code !== 'invalid_union' || typeof input !== 'object' || input === null) {
    return `got ${describeValue(input)}, expected a shape: an object with the key "shape"`;
  }
  const name = 'shape' in input ? input.shape : undefined;
  if (name === 'image') return `got "image", expected another shape: a labelled image ${use}; ${NOT_BUILT}`;
  const near = typeof name === 'string' ? `, the nearest is ${nearestWord(name, SHAPE_NAMES)}` : '';
  return `got ${describeValue(name)}, expected ${listWords(SHAPE_NAMES)}${near}`;
};

const PART = anyShape({}) as unknown as z.ZodType<Shape>;

const WEIGHTED = anyShape(DEMAND_FIELDS, 'as a part of the demand') as unknown as z.ZodType<Weighted>;

/** The tissue: a shape, the parts of it that are forbidden to vessels, and its demand. */
export const TISSUE = anyShape(TISSUE_FIELDS) as unknown as z.ZodType<
  Shape & { readonly forbidden: readonly Shape[]; readonly demand: readonly Weighted[] }
>;
