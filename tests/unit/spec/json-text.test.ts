import { describe, expect, test } from 'vitest';
import { InputError } from '../../../src/core/errors.ts';
import { MOST_NESTED, placeOf, readJsonText } from '../../../src/spec/json-text.ts';

// The grammar is that of RFC 8259; the reference reader is the engine's own JSON.parse.

const SOUND = [
  'null',
  ' \t\r\n true \n',
  '-0',
  '0.5e-3',
  '1E+9',
  '""',
  '"a\\"\\\\\\/\\b\\f\\n\\r\\t\\u00e9\\ud83d\\ude00 é 😀"',
  '[]',
  '{}',
  '[[],{},[1,[2,[3]]]]',
  '{"a":{"b":[1,{"c":null}]},"":0}',
  '"\u007f\u0085"',
];

const BROKEN = [
  '',
  '01',
  '1.',
  '.5',
  '+1',
  '1e',
  '-',
  '"',
  '"\\x"',
  '"\t"',
  '[1,]',
  '{,}',
  '{"a"}',
  '{"a":}',
  '[',
  ']',
  'tru',
  '1 2',
  "'a'",
  '\u00a01',
];

function refusal(text: string, where = 'a.json'): InputError {
  try {
    readJsonText(text, where);
  } catch (error) {
    if (error instanceof InputError) return error;
    throw error;
  }
  throw new Error(`accepted ${text}`);
}

describe('readJsonText', () => {
  test.each(SOUND)('reads %s as JSON.parse does', (text) => {
    expect(readJsonText(text, 'a.json')).toEqual({ value: JSON.parse(text), faults: [] });
  });

  test.each(BROKEN)('refuses %s as JSON.parse does', (text) => {
    expect(() => JSON.parse(text)).toThrow();
    expect(refusal(text).faults).toHaveLength(1);
  });

  test('passes over a byte order mark', () => {
    expect(readJsonText('\uFEFF{"a": 1}', 'a.json').value).toEqual({ a: 1 });
  });

  test('names the file, the line and the column', () => {
    expect(refusal('{\n  "a": 1,\n  "b": oops\n}').faults[0]).toEqual({
      code: 'bad-json',
      where: 'a.json:3:8',
      message: expect.stringContaining('got "oops", expected a value'),
    });
  });

  test('reports every key given twice, by path, and where', () => {
    const { faults } = readJsonText('{"a": [{"b": 1, "c": 2,\n "b": 3}], "a": 4}', 'a.json');
    expect(faults.map((fault) => [fault.code, fault.where])).toEqual([
      ['doubled-key', 'a[0].b'],
      ['doubled-key', 'a'],
    ]);
    expect(faults[0]?.message).toContain('line 2, column 2');
  });

  test('keys that are equal once their escapes are read are the same key', () => {
    expect(readJsonText('{"a": 1, "\\u0061": 2}', 'a.json').faults).toHaveLength(1);
  });

  test('nesting is accepted up to the limit and refused beyond', () => {
    const nest = (depth: number) => '['.repeat(depth) + ']'.repeat(depth);
    expect(readJsonText(nest(MOST_NESTED), 'a.json').faults).toEqual([]);
    expect(refusal(nest(MOST_NESTED + 2)).faults[0]?.code).toBe('too-deep');
  });

  test('a text of many megabytes neither fails nor crawls', () => {
    const long = 'x'.repeat(20_000_000);
    expect(readJsonText(JSON.stringify([long]), 'a.json').value).toEqual([long]);
  });
});

test('placeOf counts lines and columns from 1', () => {
  expect(placeOf('ab\ncd\n\ne', 0)).toEqual({ line: 1, column: 1 });
  expect(placeOf('ab\ncd\n\ne', 4)).toEqual({ line: 2, column: 2 });
  expect(placeOf('ab\ncd\n\ne', 7)).toEqual({ line: 4, column: 1 });
});
