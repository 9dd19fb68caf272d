import { distance as editDistance } from 'fastest-levenshtein';
import { type Fault, InputError, inputError } from '../core/errors.ts';
import { QUANTITIES } from './quantities.ts';

/** How much of a difference is none: a number ≥ 0 for each key of `QUANTITIES`. */
export type Tolerance = Readonly<Record<string, number>>;

/** The tolerances that hold where none are given. */
export const DEFAULT_TOLERANCE: Tolerance = Object.fromEntries(
  QUANTITIES.map((quantity) => [quantity.key, quantity.tolerance]),
);

/**
 * Reads a tolerance file: one JSON object, keys as in `QUANTITIES`; what is left out keeps its default.
 *
 * @param file name for messages
 * @throws InputError naming every unknown key, with the nearest known one, and every value that is not a number ≥ 0
 */
export function parseTolerance(text: string, file = 'tolerance'): Tolerance {
  let value: unknown;
  try {
    value = JSON.parse(text);
  } catch (error) {
    throw inputError('bad-json', file, `got no JSON: ${(error as Error).message}`);
  }
  if (typeof value !== 'object' || value === null || Array.isArray(value)) {
    throw inputError('bad-json', file, 'got no object, expected one of tolerances by key');
  }
  const faults: Fault[] = [];
  const given: Record<string, number> = {};
  for (const [key, wanted] of Object.entries(value)) {
    const where = `${file}: ${key}`;
    if (!Object.hasOwn(DEFAULT_TOLERANCE, key)) {
      faults.push({ code: 'unknown-key', where, message: `unknown key, did you mean ${nearestKey(key)}?` });
    } else if (typeof wanted !== 'number' || !(wanted >= 0) || wanted === Infinity) {
      faults.push({ code: 'out-of-range', where, message: `got ${JSON.stringify(wanted)}, expected a number ≥ 0` });
    } else given[key] = wanted;
  }
  if (faults.length > 0) throw new InputError(faults);
  return { ...DEFAULT_TOLERANCE, ...given };
}

function nearestKey(key: string): string {
  let best = '';
  let least = Infinity;
  for (const { key: known } of QUANTITIES) {
    const distance = editDistance(key.toLowerCase(), known.toLowerCase());
    if (distance < least) {
      best = known;
      least = distance;
    }
  }
  return best;
}
