import { z } from 'zod';
import { amount, amountOrNone, later, peekKey, type Raw, readTriple, triple, triplesOrNone, value } from './fields.ts';
import { describeValue } from './got.ts';
import { areNormalised, compensatedSum } from './normalise.ts';
import { type Report, record } from './record.ts';
import { COORDINATE, EXTENT } from './shape-schema.ts';
import { whole, word } from './text-schema.ts';

/** Pa, relative to what surrounds the vessels. */
const PRESSURE = { min: -1e5, max: 1e6 };
/** m³/s through one root. */
const FLOW = { min: 1e-18, max: 1e-2 };
const MOST_TERMINALS = 20_000_000;
const MOST_POINTS = 1_000_000;
const MOST_TREES = 100;
/** Of the sum. A key may hold a tenth of it, so that what rounding does to a share just above it is still accepted. */
const LEAST_SHARE = 1e-15;
const SHARE_KEY = { min: 1e-16, max: 1e9 };

const directionError = (issue: { readonly input?: unknown }) =>
  `got ${describeValue(issue.input)}, expected three numbers [x, y, z] from -1e6 to 1e6, not all nearly 0`;
const component = z.number({ error: directionError }).min(-1e6, { error: directionError }).max(1e6, {
  error: directionError,
});
const direction = z
  .tuple([component, component, component], { error: directionError })
  .refine((one) => Math.max(Math.abs(one[0]), Math.abs(one[1]), Math.abs(one[2])) >= 1e-6, {
    error: directionError,
    params: { code: 'out-of-range' },
  });

export const INLET_FIELDS = {
  position: triple('length', {
    range: COORDINATE,
    doc: 'The root of the tree: inside the tissue, on its boundary or just outside it.',
  }),
  direction: value(direction.optional(), {
    doc: 'Along which the first vessel leaves the root; any length but 0.',
    range: 'three numbers',
    fallback: 'free, or along the inward normal',
  }),
  pressure: amountOrNone('pressure', {
    range: PRESSURE,
    doc: 'Pressure at the root; above the terminals’ in a supply tree, below it in a drain.',
    fallback: '100 mmHg; 5 mmHg in a drain',
  }),
  flow: amount('flow', { range: FLOW, doc: 'Flow through the root.' }),
} as const;

const shareError = (issue: { readonly input?: unknown }) =>
  `got ${describeValue(issue.input)}, expected a number from ${SHARE_KEY.min} to ${SHARE_KEY.max}`;
const sharesError = (issue: { readonly input?: unknown }) =>
  `got ${describeValue(issue.input)}, expected "equal", "territory" or a list of numbers, one for each point`;
const shares = z.array(
  z.number({ error: shareError }).min(SHARE_KEY.min, { error: shareError }).max(SHARE_KEY.max, { error: shareError }),
  {
    error: sharesError,
  },
);
const shareWord = word(['equal', 'territory']);

/** A word or a list; a union of both would lose which number of the list is at fault. */
const sharing = z
  .unknown()
  .meta({
    anyOf: [
      { type: 'string', enum: ['equal', 'territory'] },
      { type: 'array', items: { type: 'number', minimum: SHARE_KEY.min, maximum: SHARE_KEY.max } },
    ],
  })
  .superRefine((input, context) => {
    const judged = (typeof input === 'string' ? shareWord : shares).safeParse(input, { reportInput: true });
    for (const issue of judged.error?.issues ?? []) {
      context.addIssue({ ...issue } as Parameters<typeof context.addIssue>[0]);
    }
  })
  .transform((input) => input as 'equal' | 'territory' | readonly number[])
  .optional();

export const TERMINAL_FIELDS = {
  count: value(whole(1, MOST_TERMINALS).optional(), {
    doc: 'This many terminals.',
    range: `1 to ${MOST_TERMINALS}`,
    fallback: 'one of `count`, `spacing_*`, `points_*`',
  }),
  spacing: amountOrNone('length', {
    range: EXTENT,
    doc: 'As many terminals as fit at this least distance, which is that where demand is 1 and goes with demand^(-1/3).',
    fallback: 'one of `count`, `spacing_*`, `points_*`',
  }),
  points: triplesOrNone('length', MOST_POINTS, {
    range: COORDINATE,
    doc: 'One terminal at each of these points.',
    fallback: 'one of `count`, `spacing_*`, `points_*`',
  }),
  flow_share: value(sharing, {
    doc: 'Share of the flow of each terminal: equal, by the demand of the tissue that is nearest to it, or, with `points_*`, a list, scaled to sum 1.',
    range: '"equal", "territory", or one number for each point, each 1e-15 to 1 of their sum',
    fallback: '"equal"',
  }),
  pressure: amountOrNone('pressure', {
    range: PRESSURE,
    doc: 'Pressure asked for at the terminals; information only with `least-power`.',
    fallback: '30 mmHg; none with `least-power`',
  }),
} as const;

/** Exactly one way to say where terminals go; shares that fit the points; no point twice. */
function judgeTerminals(raw: Raw, report: Report): void {
  // By the start of the key, so that a way given with a wrong unit is not reported as no way at all.
  const given = Object.keys(raw).filter((key) => raw[key] !== undefined && /^(count$|spacing|points)/.test(key));
  const kinds = new Set(given.map((key) => key.split('_')[0]));
  const wanted = 'expected exactly one of count, spacing_um and points_mm (or their other length units)';
  if (kinds.size === 0) report([], 'missing', `got none, ${wanted}`);
  if (kinds.size > 1) {
    const [first, ...more] = given;
    for (const key of more) {
      if (key.split('_')[0] !== first?.split('_')[0]) report([key], 'conflict', `got it beside ${first}, ${wanted}`);
    }
  }
  const points = peekKey(raw, 'points', 'length');
  const { flow_share: share } = raw;
  if (share !== undefined && typeof share !== 'string' && !kinds.has('points')) {
    report(['flow_share'], 'conflict', 'got flow shares without points, expected a list of them only with points_mm');
  }
  if (!points || !Array.isArray(points.value)) return;
  if (Array.isArray(share) && share.length !== points.value.length) {
    const got = `got ${describeValue(share)}`;
    report(['flow_share'], 'out-of-range', `${got}, expected ${points.value.length} numbers, one for each point`);
  }
  if (Array.isArray(share)) judgeShares(share, report);
  const firstAt = new Map<string, number>();
  points.value.forEach((value: unknown, row) => {
    const point = readTriple(value, points.unit);
    if (!point) return;
    const twin = firstAt.get(point.join());
    if (twin === undefined) firstAt.set(point.join(), row);
    else
      report([points.key, row], 'duplicate', `got the same point as ${points.key}[${twin}], expected distinct points`);
  });
}

function judgeShares(share: readonly unknown[], report: Report): void {
  if (!share.every((one): one is number => typeof one === 'number' && Number.isFinite(one) && one > 0)) return;
  if (areNormalised(share)) return;
  const sum = compensatedSum(share);
  share.forEach((one, row) => {
    if (one >= LEAST_SHARE * sum) return;
    report(['flow_share', row], 'out-of-range', `got ${one} of a sum of ${sum}, expected at least 1e-15 of the sum`);
  });
}

const NAME = /^[A-Za-z][A-Za-z0-9_]*$/;
const nameError = (issue: { readonly input?: unknown }) =>
  `got ${describeValue(issue.input)}, expected a letter, then up to 63 letters, digits and _`;

export const TREE_FIELDS = {
  name: value(
    z.string({ error: nameError }).regex(NAME, { error: nameError }).max(64, { error: nameError }).optional(),
    {
      doc: 'Name of the tree in messages, tables and patches; unique.',
      range: 'a letter, then letters, digits, `_`',
      fallback: '"supply" or "drain" for the first, then "tree_1", …',
    },
  ),
  kind: value(word(['supply', 'drain']).default('supply'), {
    doc: 'Whether blood runs from the root to the terminals or back.',
    range: '"supply" or "drain"',
    fallback: '"supply"',
  }),
  inlet: value(record('an inlet', INLET_FIELDS), { doc: 'The root of the tree.', range: 'see below' }),
  terminals: value(record('terminals', TERMINAL_FIELDS, judgeTerminals), {
    doc: 'Where the tree ends.',
    range: 'see below',
  }),
  trunk: later('a given tree to start from'),
} as const;

const treesError = (issue: { readonly input?: unknown }) =>
  `got ${describeValue(issue.input)}, expected a list of 1 to ${MOST_TREES} trees`;

/** All trees of a spec. */
export const TREES = z
  .array(record('a tree', TREE_FIELDS), { error: treesError })
  .min(1, { error: treesError })
  .max(MOST_TREES, { error: treesError });
