import { expect, test } from 'vitest';
import { specSchema } from '../../../src/spec/json-schema.ts';
import { specTable } from '../../../src/spec/table.ts';

const rows = specTable()
  .trim()
  .split('\n')
  .map((row) =>
    row
      .split(/(?<!\\)\|/)
      .slice(1, -1)
      .map((cell) => cell.trim()),
  );

test('every row has five cells and none lacks key, default, range or meaning', () => {
  for (const row of rows) {
    expect(row).toHaveLength(5);
    expect(row[0] && row[2] && row[3] && row[4], row.join(' | ')).toBeTruthy();
  }
});

test('every key that the editors’ schema knows is in the table, and no other', () => {
  const known = new Set<string>();
  const walk = (node: unknown): void => {
    if (typeof node !== 'object' || node === null) return;
    const { properties } = node as { properties?: Record<string, unknown> };
    for (const key of Object.keys(properties ?? {})) known.add(key);
    for (const inner of Object.values(node)) walk(inner);
  };
  walk(specSchema());
  const listed = new Set<string>();
  for (const [key = '', units = ''] of rows.slice(2)) {
    const name = (key.replaceAll('`', '').split(/[ .]/).pop() ?? '').replace(/_\*$/, '');
    const suffixes = units.match(/_[A-Za-z0-9_]+/g) ?? [''];
    for (const suffix of suffixes) listed.add(name + suffix);
  }
  expect([...listed].sort()).toEqual([...known].sort());
});

test('defaults, units and ranges stand in it', () => {
  const text = specTable();
  expect(text).toContain('| `blood.viscosity.value_*` | `_Pa_s` `_mPa_s` | 3.5 mPa_s | 0.00001 to 1 Pa_s |');
  expect(text).toContain('| `clearance.gap_*` | `_m` `_mm` `_um` | 0 m | 0 to 1 m |');
  expect(text).toContain(
    '| `trees[].inlet.flow_*` | `_m3_s` `_mL_min` `_uL_min` `_nL_min` | required | 1e-18 to 0.01 m3_s |',
  );
});
