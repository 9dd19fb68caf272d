import { expect, test } from 'vitest';
import { DEFAULT_TOLERANCE, parseTolerance } from '../../../src/compare/tolerance.ts';
import { InputError } from '../../../src/core/errors.ts';

function faults(text: string): string[] {
  try {
    parseTolerance(text, 'file.json');
  } catch (error) {
    expect(error).toBeInstanceOf(InputError);
    return (error as InputError).faults.map((fault) => `${fault.where}: ${fault.message}`);
  }
  return [];
}

test('what is given replaces its default, the rest stays', () => {
  expect(parseTolerance('{"position_um": 5, "order": 1}')).toEqual({ ...DEFAULT_TOLERANCE, position_um: 5, order: 1 });
  expect(parseTolerance('{}')).toEqual(DEFAULT_TOLERANCE);
});

test('all faults at once, with the nearest key', () => {
  expect(faults('{"position_mm": 5, "radius_rel": -1, "flow_rel": "small", "pressure_Pa": null, "order": 0}')).toEqual([
    'file.json: position_mm: unknown key, did you mean position_um?',
    'file.json: radius_rel: got -1, expected a number ≥ 0',
    'file.json: flow_rel: got "small", expected a number ≥ 0',
    'file.json: pressure_Pa: got null, expected a number ≥ 0',
  ]);
});

test.each(['', '[1]', 'null', '{"position_um": 1'])('no object: %s', (text) => {
  expect(faults(text)).toHaveLength(1);
});
