import { z } from 'zod';
import { describeValue, listWords, nearestWord } from './got.ts';

/** One line of text of 1 to `most` characters, none of them control characters. */
export function line(what: string, most: number) {
  const error = (issue: { readonly input?: unknown }) =>
    `got ${describeValue(issue.input)}, expected ${what}: one line of 1 to ${most} characters`;
  return z
    .string({ error })
    .min(1, { error })
    .max(most, { error })
    .regex(/^\P{Cc}*$/u, { error });
}

/** One of a few words, with the nearest named where another was got. */
export function word<const W extends readonly [string, ...string[]]>(words: W) {
  return z.enum(words, {
    error: ({ input }) => {
      const near =
        typeof input === 'string' && words.length > 2 ? `, the nearest is "${nearestWord(input, words)}"` : '';
      return `got ${describeValue(input)}, expected ${listWords(words.map((one) => `"${one}"`))}${near}`;
    },
  });
}

/** A whole number from `min` to `max`. */
export function whole(min: number, max: number) {
  const error = (issue: { readonly input?: unknown }) =>
    `got ${describeValue(issue.input)}, expected a whole number from ${min} to ${max}`;
  return z.number({ error }).int({ error }).min(min, { error }).max(max, { error });
}

/** A number without a unit from `min` to `max`. */
export function plain(min: number, max: number) {
  const error = (issue: { readonly input?: unknown }) =>
    `got ${describeValue(issue.input)}, expected a number from ${min} to ${max}`;
  return z.number({ error }).min(min, { error }).max(max, { error });
}
