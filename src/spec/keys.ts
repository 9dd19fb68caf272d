import { distance } from 'fastest-levenshtein';
import { UNITS } from '../core/units.ts';
import { type Field, isUnit, type QuantityField, type Raw } from './fields.ts';
import { describeValue, listWords, nearestWord, quote } from './got.ts';
import { keysOf, unitsOf, wantedKeys } from './quantity.ts';

/** A fault of one key of one object. */
export interface KeyFault {
  readonly key: string;
  readonly code: string;
  readonly message: string;
}

export type Fields = Readonly<Record<string, Field<unknown>>>;

/** Every key an object may carry, units spelt out. */
export function knownKeys(fields: Fields): string[] {
  return Object.entries(fields).flatMap(([name, field]) => {
    if (field.form === 'later') return [];
    return field.form === 'quantity' ? keysOf(name, field.quantity) : [name];
  });
}

/**
 * Judges the keys of one object: unknown ones, units that are missing, doubled, unknown or of another quantity, and
 * quantities that are not there at all. One slip gives one fault: `raduis_mm` is not reported as a missing radius too.
 */
export function judgeKeys(raw: Raw, fields: Fields): KeyFault[] {
  const faults: KeyFault[] = [];
  const known = knownKeys(fields);
  const knownSet = new Set(known);
  const excused = new Set<string>();
  for (const key of Object.keys(raw)) {
    if (knownSet.has(key) || raw[key] === undefined) continue;
    const fault = judgeStrangeKey(key, raw[key], fields, known, excused);
    faults.push({ key, ...fault });
  }
  for (const [name, field] of Object.entries(fields)) {
    if (field.form === 'quantity') faults.push(...judgeUnits(name, field, raw, excused.has(name)));
  }
  return faults;
}

function judgeUnits(name: string, field: QuantityField<unknown>, raw: Raw, excused: boolean): KeyFault[] {
  const [first, ...more] = keysOf(name, field.quantity).filter((key) => raw[key] !== undefined);
  if (first === undefined) {
    if (!field.required || excused) return [];
    return [{ key: name, code: 'missing', message: `got nothing, expected ${wantedKeys(name, field.quantity)}` }];
  }
  return more.map((key) => ({
    key,
    code: 'doubled-unit',
    message: `got it beside ${first}, expected ${wantedKeys(name, field.quantity)}`,
  }));
}

function judgeStrangeKey(
  key: string,
  value: unknown,
  fields: Fields,
  known: readonly string[],
  excused: Set<string>,
): Omit<KeyFault, 'key'> {
  const named = Object.hasOwn(fields, key) ? fields[key] : undefined;
  if (named?.form === 'later') return { code: 'not-built', message: `got ${describeValue(value)}, ${named.message}` };
  if (named?.form === 'quantity') {
    excused.add(key);
    const message = `got ${describeValue(value)} without a unit, expected ${wantedKeys(key, named.quantity)}`;
    return { code: 'unit', message };
  }
  const owner = ownerOf(key, fields);
  if (owner) {
    excused.add(owner.name);
    const suffix = key.slice(owner.name.length + 1);
    const got = isUnit(suffix) ? `a unit of ${UNITS[suffix].quantity}` : `the unit ${quote(suffix)}`;
    return { code: 'unit', message: `got ${got}, expected ${wantedKeys(owner.name, owner.field.quantity)}` };
  }
  const near = nearestWord(key, known);
  if (near === undefined) return { code: 'unknown-key', message: 'got an unknown key, expected none here' };
  if (distance(key.slice(0, 100), near) <= Math.max(2, near.length / 4)) {
    const meant = Object.entries(fields).find(([name, field]) => field.form === 'quantity' && ownsKey(name, near));
    if (meant) excused.add(meant[0]);
  }
  const all = known.length <= 8 ? `; known here: ${listWords(known, 'and')}` : '';
  return { code: 'unknown-key', message: `got an unknown key, expected a known one, the nearest is ${near}${all}` };
}

/** The quantity whose name and an underscore begin a key; the longest such name. */
function ownerOf(key: string, fields: Fields): { name: string; field: QuantityField<unknown> } | undefined {
  let best: { name: string; field: QuantityField<unknown> } | undefined;
  for (const [name, field] of Object.entries(fields)) {
    if (field.form !== 'quantity' || !ownsKey(name, key)) continue;
    if (!best || name.length > best.name.length) best = { name, field };
  }
  // `flow_share` beside `flow`: a tail far longer than any unit is another word, not a unit.
  const longest = best ? Math.max(...unitsOf(best.field.quantity).map((unit) => unit.length)) : 0;
  return best && key.length - best.name.length - 1 <= longest + 6 ? best : undefined;
}

function ownsKey(name: string, key: string): boolean {
  return key.startsWith(`${name}_`) && key.length > name.length + 1;
}
