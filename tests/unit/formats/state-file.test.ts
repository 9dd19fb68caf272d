import { describe, expect, test } from 'vitest';
import { InputError } from '../../../src/core/errors.ts';
import type { StateOut } from '../../../src/core/state.ts';
import { HEAD, openBytes, savedBytes } from '../../support/saved-states.ts';

const REALS = Float64Array.of(1 / 3, Number.NaN, Number.NEGATIVE_INFINITY, -0, 5e-324);
/** More than the file is read and written by at once. */
const MANY = Int32Array.from({ length: 300_001 }, (_, k) => Math.imul(k, 0x9e3779b1));

function save(out: StateOut): void {
  out.put('reals', REALS);
  out.list('numbers', 'f64', [0.1, Number.NaN]);
  const part = out.within('part');
  part.put('many', MANY);
  part.list('rows', 'i32', [3, -1, 7]);
  part.put('none', new Float64Array(0));
}

function refusal(bytes: Uint8Array, head = HEAD): string {
  try {
    openBytes(bytes, head);
  } catch (error) {
    if (error instanceof InputError) return error.message;
    throw error;
  }
  return 'none';
}

describe('a saved state', () => {
  const bytes = savedBytes(save);

  test('comes back bit by bit', () => {
    const saved = openBytes(bytes);
    expect(saved.reals('reals')).toEqual(REALS);
    expect(Object.is(saved.reals('reals')[3], -0)).toBe(true);
    expect([...saved.reals('numbers')]).toEqual([0.1, Number.NaN]);
    const part = saved.within('part');
    expect(Buffer.compare(Buffer.from(part.wholes('many').buffer), Buffer.from(MANY.buffer))).toBe(0);
    expect([...part.wholes('rows')]).toEqual([3, -1, 7]);
    expect(part.reals('none').length).toBe(0);
    expect(part.hasWholes('rows')).toBe(true);
    expect(part.hasWholes('other')).toBe(false);
  });

  test('fills the beginning of longer columns, also of memory that threads share', () => {
    const column = new Int32Array(new SharedArrayBuffer(4 * 5)).fill(9);
    openBytes(bytes).within('part').wholes('rows', column);
    expect([...column]).toEqual([3, -1, 7, 9, 9]);
  });

  test('is refused where a column is not as it was put', () => {
    const saved = openBytes(bytes);
    expect(() => saved.reals('part.rows')).toThrow(InputError);
    expect(() => saved.reals('other')).toThrow(InputError);
    expect(() => saved.reals('reals', new Float64Array(4))).toThrow(InputError);
  });

  test('is refused where it is of other work or another program', () => {
    expect(refusal(bytes)).toBe('none');
    expect(refusal(bytes, { ...HEAD, work: 'b' })).toMatch(/^some\.snapshot: got a snapshot of another spec/);
    expect(refusal(bytes, { ...HEAD, program: 'test 2' })).toMatch(/got a snapshot of test 1, where this is test 2/);
  });

  test('is refused where it is cut short anywhere', () => {
    for (const length of [0, 7, 16, 40, 200, 8 * 1000, bytes.length - 8, bytes.length - 1]) {
      expect(refusal(bytes.slice(0, length))).toMatch(/^some\.snapshot: got /);
    }
  });

  test('is refused where any bit has changed', () => {
    for (let k = 0; k < 400; k++) {
      const at = k < 200 ? k : Math.floor((bytes.length * (k - 200)) / 200);
      const broken = bytes.slice();
      broken[at]! ^= 1 << (k % 8);
      expect([at, refusal(broken)]).not.toEqual([at, 'none']);
    }
  });

  test('is refused where it is no snapshot', () => {
    expect(refusal(new TextEncoder().encode('{ "tissue": "some text, as long as it must be" }'))).toMatch(
      /no snapshot/,
    );
  });
});
