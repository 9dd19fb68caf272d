import { expect, test } from 'vitest';
import { amount, amountOrNone, later, triple, value } from '../../../src/spec/fields.ts';
import { judgeKeys, knownKeys } from '../../../src/spec/keys.ts';
import { whole } from '../../../src/spec/text-schema.ts';

const RANGE = { min: 0, max: 1 };
const FIELDS = {
  count: value(whole(1, 9).optional(), { doc: '' }),
  radius: amount('length', { range: RANGE, doc: '' }),
  pressure: amountOrNone('pressure', { range: RANGE, doc: '', fallback: 'none' }),
  flow: amountOrNone('flow', { range: RANGE, doc: '', fallback: 'none' }),
  flow_share: value(whole(1, 9).optional(), { doc: '' }),
  min: triple('length', { range: RANGE, doc: '' }),
  demand: later('perfusion that varies'),
};

const judge = (raw: Record<string, unknown>) =>
  judgeKeys({ radius_m: 1, min_m: [0, 0, 0], ...raw }, FIELDS).map(
    ({ key, code, message }) => `${key} ${code}: ${message}`,
  );

test('known keys have their units spelt out and leave out what is not built', () => {
  expect(knownKeys({ radius: FIELDS.radius, count: FIELDS.count, demand: FIELDS.demand })).toEqual([
    'radius_m',
    'radius_mm',
    'radius_um',
    'count',
  ]);
});

test('a sound object has no fault', () => {
  expect(judge({ count: 1, pressure_kPa: 1, flow_share: 2 })).toEqual([]);
});

test('a missing quantity names every key it may have', () => {
  expect(judge({ radius_m: undefined })).toEqual([
    'radius missing: got nothing, expected exactly one of radius_m, radius_mm or radius_um',
  ]);
});

test('a doubled quantity is reported at the later unit', () => {
  expect(judge({ radius_um: 3 })).toEqual([
    'radius_um doubled-unit: got it beside radius_m, expected exactly one of radius_m, radius_mm or radius_um',
  ]);
});

test('units: none, unknown, of another quantity; each one fault, not a missing quantity too', () => {
  const wanted = 'expected exactly one of radius_m, radius_mm or radius_um';
  expect(judge({ radius_m: undefined, radius: 3 })).toEqual([`radius unit: got 3 without a unit, ${wanted}`]);
  expect(judge({ radius_m: undefined, radius_inch: 3 })).toEqual([`radius_inch unit: got the unit "inch", ${wanted}`]);
  expect(judge({ radius_m: undefined, radius_Pa: 3 })).toEqual([`radius_Pa unit: got a unit of pressure, ${wanted}`]);
  expect(judge({ radius_m: undefined, radius_MM: 3 })).toEqual([`radius_MM unit: got the unit "MM", ${wanted}`]);
});

test('a misspelt key is one fault and names the nearest', () => {
  const faults = judge({ radius_m: undefined, raduis_mm: 3 });
  expect(faults).toHaveLength(1);
  expect(faults[0]).toMatch(/^raduis_mm unknown-key: .*nearest is radius_mm/);
});

test('a strange key far from every known one leaves a missing quantity to be reported', () => {
  expect(judge({ radius_m: undefined, thickness: 3 }).map((one) => one.split(':')[0])).toEqual([
    'thickness unknown-key',
    'radius missing',
  ]);
});

test('what is not built is not called unknown', () => {
  expect(judge({ demand: [] })).toEqual([
    'demand not-built: got a list of 0, expected no such key: perfusion that varies; this version does not have it yet',
  ]);
});

test('a word that begins like a quantity is not taken for a unit', () => {
  expect(judge({ flow_split_at_junctions: 1 })[0]).toMatch(/^flow_split_at_junctions unknown-key/);
});

test('an object that knows no keys says so', () => {
  expect(judgeKeys({ a: 1 }, {})[0]?.message).toBe('got an unknown key, expected none here');
});
