import type { Comparison } from './comparison.ts';

/** A comparison as one JSON document, without a newline at the end; what is not a number becomes null. */
export function compareJson(result: Comparison): string {
  return JSON.stringify(result, null, 2);
}
