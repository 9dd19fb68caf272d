import { z } from 'zod';
import { type Field, isObject, type Raw } from './fields.ts';
import { describeValue } from './got.ts';
import { type Fields, judgeKeys } from './keys.ts';
import { keysOf, unitsOf } from './quantity.ts';

/** Reports a fault of the object under judgement, at a path within it. */
export type Report = (path: readonly (string | number)[], code: string, message: string) => void;

/** What the fields of an object come to, quantities in SI. */
export type Taken<F> = { readonly [K in keyof F]: F[K] extends Field<infer T> ? T : never };

/** The fields behind the schema of an object, for the tables that are made from it. */
const fieldsBehind = new WeakMap<object, Fields>();

/**
 * The schema of one object of a spec: strict keys, one key per quantity and allowed unit, every fault reported.
 *
 * @param what   what the object is, for messages: `a sphere`
 * @param fields name without unit → field
 * @param judge  rules between keys of this object; gets it as read, because it runs even where single keys are at fault
 */
export function record<F extends Fields>(
  what: string,
  fields: F,
  judge?: (raw: Raw, report: Report) => void,
): z.ZodType<Taken<F>> {
  const shape: Record<string, z.ZodType> = {};
  for (const [name, field] of Object.entries(fields)) {
    if (field.form === 'value') shape[name] = field.schema;
    if (field.form !== 'quantity') continue;
    for (const unit of unitsOf(field.quantity)) shape[`${name}_${unit}`] = field.schemaIn(unit).optional();
  }
  // Loose, because the keys are judged below with better messages than the library's own; the editors' schema is strict.
  const object = z
    .looseObject(shape, { error: (issue) => `got ${describeValue(issue.input)}, expected ${what}: an object` })
    .superRefine(
      (raw, context) => {
        const report: Report = (path, code, message) =>
          context.addIssue({ code: 'custom', path: [...path], message, params: { code } });
        for (const { key, code, message } of judgeKeys(raw, fields)) report([key], code, message);
        judge?.(raw, report);
      },
      // Runs in spite of faults found before, so that all are reported at once.
      { when: (payload) => isObject(payload.value) },
    );
  fieldsBehind.set(object, fields);
  return object.transform((raw) => {
    const taken: Record<string, unknown> = {};
    for (const [name, field] of Object.entries(fields)) taken[name] = field.take(raw, name);
    return taken as Taken<F>;
  });
}

/** Adds to an object's JSON schema what keys alone cannot say: no other keys, one unit per quantity. */
export function tightenJsonSchema(schema: object, json: Record<string, unknown>): void {
  const fields = fieldsBehind.get(schema);
  if (!fields) return;
  json.additionalProperties = false;
  const choices: object[] = [];
  for (const [name, field] of Object.entries(fields)) {
    if (field.form !== 'quantity') continue;
    const one = keysOf(name, field.quantity).map((key) => ({ required: [key] }));
    choices.push({ oneOf: field.required ? one : [...one, { not: { anyOf: one } }] });
  }
  if (choices.length > 0) json.allOf = choices;
}
