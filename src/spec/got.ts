import { closest } from 'fastest-levenshtein';

/** Closes every message about something the format names but this version cannot do; gives such a fault its code. */
export const NOT_BUILT = 'this version does not have it yet';

/** What was got, short enough for one line of a message. */
export function describeValue(value: unknown): string {
  if (value === undefined) return 'nothing';
  if (typeof value === 'string') return quote(value);
  if (Array.isArray(value)) return value.length === 1 ? 'a list of 1' : `a list of ${value.length}`;
  if (typeof value === 'object' && value !== null) return 'an object';
  if (typeof value === 'bigint' || typeof value === 'symbol' || typeof value === 'function') return `a ${typeof value}`;
  return String(value);
}

/** Text in quotes, cut at 60 characters, control characters escaped. */
export function quote(text: string): string {
  return JSON.stringify(text.length > 60 ? `${text.slice(0, 57)}...` : text);
}

/** `a`, `a or b`, `a, b or c`. */
export function listWords(words: readonly string[], last = 'or'): string {
  if (words.length < 2) return words.join('');
  return `${words.slice(0, -1).join(', ')} ${last} ${words[words.length - 1]}`;
}

/** A number as a range is stated: six digits at most, no trailing dust. */
export function shortNumber(value: number): string {
  return String(Number(value.toPrecision(6)));
}

/** The word of a list that is nearest to a text by edit distance; undefined for an empty list. */
export function nearestWord(text: string, words: readonly string[]): string | undefined {
  // Edit distance is quadratic: an absurdly long key is cut before it is compared.
  return words.length > 0 ? closest(text.slice(0, 100), [...words]) : undefined;
}
