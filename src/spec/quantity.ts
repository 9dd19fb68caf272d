import { z } from 'zod';
import { fromSi, type Quantity, toSi, UNITS, type Unit } from '../core/units.ts';
import { describeValue, listWords, shortNumber } from './got.ts';
import type { Triple } from './types.ts';

/** Least and greatest value that is believed, in SI, ends included. */
export interface Range {
  readonly min: number;
  readonly max: number;
}

/** Every unit of a quantity, the SI one first. */
export function unitsOf(quantity: Quantity): Unit[] {
  return (Object.keys(UNITS) as Unit[]).filter((unit) => UNITS[unit].quantity === quantity);
}

/** The keys that may carry a quantity: `radius_m`, `radius_mm`, `radius_um`. */
export function keysOf(name: string, quantity: Quantity): string[] {
  return unitsOf(quantity).map((unit) => `${name}_${unit}`);
}

/** `one of radius_m, radius_mm, radius_um`, or the only key there is. */
export function wantedKeys(name: string, quantity: Quantity): string {
  const keys = keysOf(name, quantity);
  return keys.length === 1 ? String(keys[0]) : `exactly one of ${listWords(keys)}`;
}

/** A range in a unit, as messages and the table state it. */
export function rangeText(range: Range, unit: Unit): string {
  return `${shortNumber(fromSi(range.min, unit))} to ${shortNumber(fromSi(range.max, unit))}`;
}

/** One number in a unit, its range judged after conversion so that every unit has the same limits to the last bit. */
export function numberIn(unit: Unit, range: Range) {
  const wanted = `a number from ${rangeText(range, unit)} (${unit})`;
  const error = (issue: { readonly input?: unknown }) => `got ${describeValue(issue.input)}, expected ${wanted}`;
  return z
    .number({ error })
    .refine((value) => isWithin(toSi(value, unit), range), { error, params: { code: 'out-of-range' } })
    .meta({ minimum: roundLimit(fromSi(range.min, unit)), maximum: roundLimit(fromSi(range.max, unit)) });
}

/** Three numbers in a unit: a point or three extents. */
export function tripleIn(unit: Unit, range: Range) {
  const one = numberIn(unit, range);
  return z.tuple([one, one, one], {
    error: (issue) => `got ${describeValue(issue.input)}, expected three numbers [x, y, z] (${unit})`,
  });
}

/** A list of points in a unit. */
export function triplesIn(unit: Unit, range: Range, most: number) {
  const error = (issue: { readonly input?: unknown }) =>
    `got ${describeValue(issue.input)}, expected a list of 1 to ${most} points [x, y, z] (${unit})`;
  return z.array(tripleIn(unit, range), { error }).min(1, { error }).max(most, { error });
}

/** SI value of a number in a unit; −0 becomes 0, because JSON text may drop the sign. */
export function numberToSi(value: number, unit: Unit): number {
  return toSi(value, unit) + 0;
}

/** SI values of three numbers in a unit. */
export function tripleToSi(value: Triple, unit: Unit): Triple {
  return [numberToSi(value[0], unit), numberToSi(value[1], unit), numberToSi(value[2], unit)];
}

/** True for a finite number inside a range, ends included. */
export function isWithin(value: number, range: Range): boolean {
  return value >= range.min && value <= range.max;
}

function roundLimit(value: number): number {
  return Number(value.toPrecision(12));
}
