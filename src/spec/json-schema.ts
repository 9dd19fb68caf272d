import { z } from 'zod';
import { tightenJsonSchema } from './record.ts';
import { SPEC } from './schema.ts';

/** JSON schema (draft 2020-12) of a spec, for editors; made from the same schema that parses. */
export function specSchema(): object {
  const schema = z.toJSONSchema(SPEC, {
    io: 'input',
    override: ({ zodSchema, jsonSchema }) => {
      const json = jsonSchema as Record<string, unknown>;
      tightenJsonSchema(zodSchema, json);
      shortenTuple(json);
    },
  });
  return {
    ...schema,
    title: 'Spec of a vascular tree',
    description: 'Units are in the keys; every fault is reported at once.',
  };
}

/** Says "three of the same" once instead of three times. */
function shortenTuple(json: Record<string, unknown>): void {
  const { prefixItems: items } = json;
  if (!Array.isArray(items) || new Set(items.map((item) => JSON.stringify(item))).size !== 1) return;
  delete json.prefixItems;
  json.items = items[0];
}
