import { readFileSync, writeFileSync } from 'node:fs';
import { expect, test } from 'vitest';
import { specSchema } from '../../../src/spec/json-schema.ts';
import { SPEC_FIELDS } from '../../../src/spec/schema.ts';

const FILE = new URL('../../../presets/spec.schema.json', import.meta.url);

// biome-ignore lint/suspicious/noExplicitAny: a JSON schema is read by hand here
const schema = specSchema() as any;

test('presets/spec.schema.json is what the schema says (UPDATE=1 writes it)', () => {
  const text = `${JSON.stringify(schema, null, 2)}\n`;
  if (process.env.UPDATE === '1') writeFileSync(FILE, text);
  expect(readFileSync(FILE, 'utf8')).toBe(text);
});

test('it has every key, closed, with descriptions and defaults', () => {
  expect(Object.keys(schema.properties)).toEqual(Object.keys(SPEC_FIELDS));
  expect(schema.additionalProperties).toBe(false);
  expect(schema.required).toEqual(['tissue', 'trees']);
  const { viscosity, density_kg_m3: density } = schema.properties.blood.properties;
  expect(density).toEqual({
    type: 'number',
    minimum: 100,
    maximum: 20_000,
    default: 1060,
    description: 'Density. In kg_m3.',
  });
  expect(viscosity.properties.value_mPa_s.default).toBe(3.5);
  expect(viscosity.properties.value_Pa_s.default).toBeUndefined();
});

test('a quantity is asked for in exactly one unit', () => {
  const inlet = schema.properties.trees.items.properties.inlet;
  expect(inlet.allOf).toContainEqual({
    oneOf: [{ required: ['position_m'] }, { required: ['position_mm'] }, { required: ['position_um'] }],
  });
  const given = ['pressure_Pa', 'pressure_kPa', 'pressure_mmHg'].map((key) => ({ required: [key] }));
  expect(inlet.allOf).toContainEqual({ oneOf: [...given, { not: { anyOf: given } }] });
});

test('what is not built is not offered', () => {
  const text = JSON.stringify(schema);
  for (const key of ['"trunk"', '"image"']) expect(text).not.toContain(key);
});

test('no object of it is open', () => {
  const open: string[] = [];
  const walk = (node: unknown, path: string): void => {
    if (typeof node !== 'object' || node === null) return;
    if ('properties' in node && (node as { additionalProperties?: unknown }).additionalProperties !== false)
      open.push(path);
    for (const [key, inner] of Object.entries(node)) walk(inner, `${path}/${key}`);
  };
  walk(schema, '');
  expect(open).toEqual([]);
});
