import type { z } from 'zod';
import { InvariantError } from '../core/errors.ts';
import { type Quantity, toSi, UNITS, type Unit } from '../core/units.ts';
import { NOT_BUILT } from './got.ts';
import { numberIn, numberToSi, type Range, rangeText, tripleIn, triplesIn, tripleToSi, unitsOf } from './quantity.ts';
import type { Triple } from './types.ts';

/** An object of a spec as it was read. */
export type Raw = Readonly<Record<string, unknown>>;

/** A default as the table states it. */
export interface Amount {
  readonly value: number;
  readonly unit: Unit;
}

interface FieldBase<T> {
  /** What the key means, one line. */
  readonly doc: string;
  /** What the table says in its columns for range and default; an empty default means that the key is required. */
  readonly range: string;
  readonly fallback: string;
  /** The field's value out of an object whose keys have all been judged good. */
  readonly take: (raw: Raw, name: string) => T;
}

/** A key without a unit. */
export interface ValueField<T> extends FieldBase<T> {
  readonly form: 'value';
  readonly schema: z.ZodType;
}

/** One of several keys, each the name and a unit suffix. */
export interface QuantityField<T> extends FieldBase<T> {
  readonly form: 'quantity';
  readonly quantity: Quantity;
  readonly required: boolean;
  readonly schemaIn: (unit: Unit) => z.ZodType;
  readonly preset: Amount | undefined;
}

/** A key that the format has and this version refuses; never part of the editors' schema. */
export interface LaterField extends FieldBase<undefined> {
  readonly form: 'later';
  readonly message: string;
}

export type Field<T> = ValueField<T> | QuantityField<T> | LaterField;

interface ValueText {
  readonly doc: string;
  readonly range?: string;
  readonly fallback?: string;
}

/** A key without a unit; presence and default are the schema's own (`optional`, `default`, `prefault`). */
export function value<T>(schema: z.ZodType<T>, text: ValueText): ValueField<T> {
  return {
    form: 'value',
    doc: text.doc,
    range: text.range ?? '',
    fallback: text.fallback ?? '',
    schema: schema.describe(text.doc),
    take: (raw, name) => raw[name] as T,
  };
}

/** What `demand`, `trunk` and the like are until they are built. */
export function later(what: string): LaterField {
  return {
    form: 'later',
    doc: what,
    range: '',
    fallback: '',
    message: `expected no such key: ${what}; ${NOT_BUILT}`,
    take: () => undefined,
  };
}

interface QuantityText {
  readonly range: Range;
  readonly doc: string;
}

/** A number with a unit that must be there. */
export function amount(quantity: Quantity, text: QuantityText): QuantityField<number> {
  return quantityField(quantity, text, { required: true, preset: undefined }, numberIn, numberToSi, missing);
}

/** A number with a unit and a default. */
export function amountOr(quantity: Quantity, preset: Amount, text: QuantityText): QuantityField<number> {
  const otherwise = () => toSi(preset.value, preset.unit);
  return quantityField(quantity, text, { required: false, preset }, numberIn, numberToSi, otherwise);
}

/** A number with a unit that may be left out. */
export function amountOrNone(
  quantity: Quantity,
  text: QuantityText & { readonly fallback: string },
): QuantityField<number | undefined> {
  const presence = { required: false, preset: undefined, fallback: text.fallback };
  return quantityField<number, number | undefined>(quantity, text, presence, numberIn, numberToSi, () => undefined);
}

/** Three numbers with a unit that must be there. */
export function triple(quantity: Quantity, text: QuantityText): QuantityField<Triple> {
  return quantityField(quantity, text, { required: true, preset: undefined }, tripleIn, tripleToSi, missing);
}

/** A list of points with a unit that may be left out. */
export function triplesOrNone(
  quantity: Quantity,
  most: number,
  text: QuantityText & { readonly fallback: string },
): QuantityField<readonly Triple[] | undefined> {
  return quantityField<readonly Triple[], readonly Triple[] | undefined>(
    quantity,
    text,
    { required: false, preset: undefined, fallback: text.fallback },
    (unit, range) => triplesIn(unit, range, most),
    (points, unit) => points.map((point) => tripleToSi(point, unit)),
    () => undefined,
  );
}

function quantityField<V, T>(
  quantity: Quantity,
  text: QuantityText,
  presence: { readonly required: boolean; readonly preset: Amount | undefined; readonly fallback?: string },
  schemaIn: (unit: Unit, range: Range) => z.ZodType,
  convert: (value: V, unit: Unit) => T,
  otherwise: () => T,
): QuantityField<T> {
  const { preset } = presence;
  const shown = unitsOf(quantity)[0] as Unit;
  return {
    form: 'quantity',
    quantity,
    doc: text.doc,
    range: `${rangeText(text.range, shown)} ${shown}`,
    fallback: preset ? `${preset.value} ${preset.unit}` : (presence.fallback ?? ''),
    required: presence.required,
    preset,
    schemaIn: (unit) => {
      const schema = schemaIn(unit, text.range).describe(`${text.doc} In ${unit}.`);
      return preset?.unit === unit ? schema.meta({ ...schema.meta(), default: preset.value }) : schema;
    },
    take: (raw, name) => {
      for (const unit of unitsOf(quantity)) {
        const found = raw[`${name}_${unit}`];
        if (found !== undefined) return convert(found as V, unit);
      }
      return otherwise();
    },
  };
}

function missing(): never {
  throw new InvariantError('quantityField: a required quantity was read before its object was judged');
}

/** A number with a unit in an object nobody has judged yet: SI, or undefined unless exactly one key holds a finite number. */
export function peekNumber(raw: unknown, name: string, quantity: Quantity): number | undefined {
  const found = peekKey(raw, name, quantity);
  if (!found || typeof found.value !== 'number' || !Number.isFinite(found.value)) return undefined;
  return numberToSi(found.value, found.unit);
}

/** Three numbers with a unit in an object nobody has judged yet. */
export function peekTriple(raw: unknown, name: string, quantity: Quantity): Triple | undefined {
  const found = peekKey(raw, name, quantity);
  return found ? readTriple(found.value, found.unit) : undefined;
}

/** The key and unit under which an unjudged object holds a quantity, if it is exactly one. */
export function peekKey(
  raw: unknown,
  name: string,
  quantity: Quantity,
): { readonly key: string; readonly unit: Unit; readonly value: unknown } | undefined {
  if (!isObject(raw)) return undefined;
  const present = unitsOf(quantity).filter((unit) => raw[`${name}_${unit}`] !== undefined);
  const unit = present[0];
  if (unit === undefined || present.length > 1) return undefined;
  return { key: `${name}_${unit}`, unit, value: raw[`${name}_${unit}`] };
}

/** Three finite numbers in a unit as SI, or undefined. */
export function readTriple(value: unknown, unit: Unit): Triple | undefined {
  if (!Array.isArray(value) || value.length !== 3) return undefined;
  if (!value.every((one) => typeof one === 'number' && Number.isFinite(one))) return undefined;
  return tripleToSi(value as unknown as Triple, unit);
}

/** True for what JSON calls an object. */
export function isObject(value: unknown): value is Raw {
  return typeof value === 'object' && value !== null && !Array.isArray(value);
}

/** True if a suffix is one of the closed list of units. */
export function isUnit(text: string): text is Unit {
  return Object.hasOwn(UNITS, text);
}
