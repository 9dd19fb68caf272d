import { z } from 'zod';
import { toSi } from '../core/units.ts';
import { amountOr, amountOrNone, type Raw, value } from './fields.ts';
import { describeValue, NOT_BUILT } from './got.ts';
import { keysOf } from './quantity.ts';
import { type Report, record } from './record.ts';
import { EXTENT, TISSUE } from './shape-schema.ts';
import { SOLVED_AGAIN, VISCOSITY_RANGE } from './solved-again.ts';
import { line, plain, whole, word } from './text-schema.ts';
import { TREES } from './tree-schema.ts';

/** The layout of spec files this version reads and writes. */
export const SPEC_FORMAT = 1;

export const VISCOSITY_FIELDS = {
  law: value(
    z
      .literal('constant', {
        error: ({ input }) =>
          typeof input === 'string'
            ? `got ${describeValue(input)}, expected "constant": any other viscosity law; ${NOT_BUILT}`
            : `got ${describeValue(input)}, expected "constant"`,
      })
      .default('constant'),
    { doc: 'Viscosity law.', range: '"constant"', fallback: '"constant"' },
  ),
  value: amountOr('viscosity', { value: 3.5, unit: 'mPa_s' }, { range: VISCOSITY_RANGE, doc: 'Dynamic viscosity.' }),
} as const;

export const BLOOD_FIELDS = {
  viscosity: value(record('a viscosity', VISCOSITY_FIELDS).prefault({}), {
    doc: 'How viscous blood is.',
    range: 'see below',
    fallback: 'see below',
  }),
  density: amountOr('density', { value: 1060, unit: 'kg_m3' }, { range: { min: 100, max: 20_000 }, doc: 'Density.' }),
} as const;

const RULES = ['least-power', 'junction-exponent', 'pressure-matched'] as const;

export const SIZING_FIELDS = {
  rule: value(word(RULES).default('least-power'), {
    doc: 'What the radii obey.',
    range: RULES.map((rule) => `"${rule}"`).join(', '),
    fallback: '"least-power"',
  }),
  maintenance: amountOr(
    'maintenance',
    { value: 625, unit: 'W_m3' },
    { range: { min: 1e-3, max: 1e9 }, doc: 'Power that keeping blood costs; part of the cost under every rule.' },
  ),
  junction_exponent: value(plain(2, 4).optional(), {
    doc: 'γ in r₀^γ = Σ rᵢ^γ; not with `least-power`, where 3 follows.',
    range: '2 to 4',
    fallback: '3',
  }),
  terminal_radius: amountOrNone('length', {
    range: EXTENT,
    doc: 'Radius of the terminals, or their mean; only with `junction-exponent`.',
    fallback: 'from the mean terminal pressure',
  }),
  inlet_radius: amountOrNone('length', {
    range: EXTENT,
    doc: 'Radius of the first vessel; only with `junction-exponent`.',
    fallback: 'from the mean terminal pressure',
  }),
} as const;

/** Refuses keys the rule would ignore: a number that has no effect is a trap. */
function judgeSizing(raw: Raw, report: Report): void {
  const { rule = 'least-power' } = raw;
  if (raw.junction_exponent !== undefined && rule === 'least-power') {
    const got = `got ${describeValue(raw.junction_exponent)} with the rule least-power`;
    report(['junction_exponent'], 'conflict', `${got}, expected it only with junction-exponent or pressure-matched`);
  }
  const terminal = keysOf('terminal_radius', 'length').filter((key) => raw[key] !== undefined);
  const inlet = keysOf('inlet_radius', 'length').filter((key) => raw[key] !== undefined);
  if (rule === 'least-power' || rule === 'pressure-matched') {
    for (const key of [...terminal, ...inlet]) {
      report([key], 'conflict', `got it with the rule ${rule}, expected it only with junction-exponent`);
    }
  } else if (terminal[0] !== undefined && inlet[0] !== undefined) {
    report([inlet[0]], 'conflict', `got it beside ${terminal[0]}, expected one of the two`);
  }
}

export const CLEARANCE_FIELDS = {
  gap: amountOr(
    'length',
    { value: 0, unit: 'm' },
    { range: { min: 0, max: 1 }, doc: 'Least distance between the walls of vessels that share no node.' },
  ),
} as const;

export const JUNCTION_FIELDS = {
  min_angle: amountOr(
    'angle',
    { value: 25, unit: 'deg' },
    { range: { min: toSi(15, 'deg'), max: toSi(60, 'deg') }, doc: 'Least angle between vessels that leave a node.' },
  ),
} as const;

const refineError = ({ input }: { readonly input?: unknown }) =>
  `got ${describeValue(input)}, expected "none", "quick", "thorough", "annealed" or a whole number of steps from 0 to 10000`;
const seedError = ({ input }: { readonly input?: unknown }) =>
  `got ${describeValue(input)}, expected a number, or one line of 1 to 200 characters`;
const formatError = ({ input }: { readonly input?: unknown }) =>
  `got ${describeValue(input)}, expected ${SPEC_FORMAT}, the layout this version reads`;

export const SPEC_FIELDS = {
  $schema: value(z.string({ error: ({ input }) => `got ${describeValue(input)}, expected a path` }).optional(), {
    doc: 'Where editors find the schema of this file; not read.',
    range: 'a path',
    fallback: 'none',
  }),
  format: value(z.literal(SPEC_FORMAT, { error: formatError }).optional(), {
    doc: 'Layout of this file.',
    range: `${SPEC_FORMAT}`,
    fallback: `${SPEC_FORMAT}`,
  }),
  version: value(line('a version', 100).optional(), {
    doc: 'Version of the program that wrote this file; not read.',
    range: 'a line of text',
    fallback: 'none',
  }),
  name: value(line('a name', 200).default('unnamed'), {
    doc: 'Name of the whole.',
    range: 'a line of text',
    fallback: '"unnamed"',
  }),
  purpose: value(line('a purpose', 1000).optional(), {
    doc: 'What the spec is for.',
    range: 'a line of text',
    fallback: 'none',
  }),
  seed: value(z.union([line('a seed', 200), z.number({ error: seedError })], { error: seedError }).default('1'), {
    doc: 'Seed of every random draw.',
    range: 'a line of text or a number',
    fallback: '"1"',
  }),
  tissue: value(TISSUE, { doc: 'Where vessels may be.', range: 'a shape, see below' }),
  trees: value(TREES, { doc: 'The trees that are grown together.', range: '1 to 100 trees' }),
  blood: value(record('blood', BLOOD_FIELDS).prefault({}), {
    doc: 'What flows.',
    range: 'see below',
    fallback: 'see below',
  }),
  sizing: value(record('sizing', SIZING_FIELDS, judgeSizing).prefault({}), {
    doc: 'How radii follow from flows.',
    range: 'see below',
    fallback: 'see below',
  }),
  clearance: value(record('clearance', CLEARANCE_FIELDS).prefault({}), {
    doc: 'How far vessels keep apart.',
    range: 'see below',
    fallback: 'see below',
  }),
  junctions: value(record('junctions', JUNCTION_FIELDS).prefault({}), {
    doc: 'What junctions must look like.',
    range: 'see below',
    fallback: 'see below',
  }),
  refine: value(
    z
      .union([z.enum(['none', 'quick', 'thorough', 'annealed'], { error: refineError }), whole(0, 10_000)], {
        error: refineError,
      })
      .default('quick'),
    {
      doc: 'How hard the grown tree is improved: a word, or a number of steps of "thorough".',
      range: '"none", "quick", "thorough", "annealed" or 0 to 10000',
      fallback: '"quick"',
    },
  ),
  solved_again: value(SOLVED_AGAIN.optional(), {
    doc: 'What was changed after growth, in a tree whose flow was solved again; not read when growing.',
    range: '`viscosity_*`, `narrowed`',
    fallback: 'none',
  }),
} as const;

/** The one schema: JSON value in, checked values in SI out; `resolve.ts` makes the `Spec` of them. */
export const SPEC = record('a spec', SPEC_FIELDS);

/** What the schema makes of a faultless value. */
export type Judged = z.output<typeof SPEC>;
