import { describe, expect, test } from 'vitest';
import { InputError } from '../../../src/core/errors.ts';
import { parseSpec } from '../../../src/spec/parse.ts';
import { soundSpec } from '../../support/bend-spec.ts';
import { BROKEN_SPECS } from '../../support/broken-specs.ts';

function refusal(text: string): InputError {
  try {
    parseSpec(text);
  } catch (error) {
    if (error instanceof InputError) return error;
    throw error;
  }
  throw new Error('the spec was accepted');
}

describe('broken specs', () => {
  test('the corpus is large, its names are distinct, and what it bends is sound', () => {
    expect(BROKEN_SPECS.length).toBeGreaterThanOrEqual(120);
    expect(new Set(BROKEN_SPECS.map((one) => one.name)).size).toBe(BROKEN_SPECS.length);
    expect(parseSpec(JSON.stringify(soundSpec())).name).toBe('sound');
  });

  test.each(BROKEN_SPECS)('$name', ({ text, where, says }) => {
    const { faults } = refusal(text);
    const hit = faults.filter((fault) => (typeof where === 'string' ? fault.where === where : where.test(fault.where)));
    expect(hit, faults.map((fault) => `${fault.where}: ${fault.message}`).join('\n')).not.toHaveLength(0);
    if (says) expect(hit.map((fault) => fault.message).join('\n')).toMatch(says);
    for (const fault of faults) {
      expect(fault.message).toMatch(/^got .*, expected /s);
      expect(fault.code).toMatch(/^[a-z-]+$/);
      expect(fault.message.length).toBeLessThan(400);
      expect(fault.where.length).toBeLessThan(200);
    }
  });
});
