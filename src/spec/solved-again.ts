import { z } from 'zod';
import { amountOrNone, isObject, value } from './fields.ts';
import { describeValue } from './got.ts';
import { record } from './record.ts';
import { line, plain } from './text-schema.ts';

/** What was changed in a tree after it was grown, before its flow was solved again. Told beside the spec; grows nothing. */
export interface SolvedAgain {
  /** Pa·s; null where it is the spec's. */
  readonly viscosity: number | null;
  /** Vessels `<tree>:<vessel number>` and the share taken off their radius, in the order in which that was done. */
  readonly narrowed: readonly { readonly vessel: string; readonly fraction: number }[];
}

/** Pa·s; viscosities that a spec may state. */
export const VISCOSITY_RANGE = { min: 1e-5, max: 1 } as const;

export const NARROWED_FIELDS = {
  vessel: value(line('a vessel', 300), { doc: 'Vessel that was narrowed.', range: '`<tree>:<vessel>`' }),
  fraction: value(plain(0, 1), { doc: 'Share taken off its radius.', range: '0 to 1' }),
} as const;

const narrowedError = ({ input }: { readonly input?: unknown }) =>
  `got ${describeValue(input)}, expected a list of vessels`;

export const SOLVED_AGAIN_FIELDS = {
  viscosity: amountOrNone('viscosity', {
    range: VISCOSITY_RANGE,
    doc: 'Viscosity the flow was solved with.',
    fallback: 'that of `blood`',
  }),
  narrowed: value(z.array(record('a narrowed vessel', NARROWED_FIELDS), { error: narrowedError }).default([]), {
    doc: 'Vessels that were narrowed.',
    range: 'a list of `vessel` and `fraction`',
    fallback: 'none',
  }),
} as const;

/** Schema of the spec's key `solved_again`. */
export const SOLVED_AGAIN = record('what was changed after growth', SOLVED_AGAIN_FIELDS);

/**
 * What the text of a spec tells of changes after growth.
 *
 * @param text JSON of a spec that `parseSpec` takes, or null
 * @returns    null where it tells of none
 */
export function solvedAgainOf(text: string | null): SolvedAgain | null {
  if (text === null || !text.includes('"solved_again"')) return null;
  const whole: unknown = JSON.parse(text.replace(/^\uFEFF/, ''));
  const judged = SOLVED_AGAIN.safeParse(isObject(whole) ? whole.solved_again : undefined);
  if (!judged.success) return null;
  const { viscosity = null, narrowed } = judged.data;
  return viscosity === null && narrowed.length === 0 ? null : { viscosity, narrowed };
}

/** The same as the value of the key; nothing where nothing was changed. */
export function solvedAgainOut(solved: SolvedAgain | null | undefined): object | undefined {
  if (solved === null || solved === undefined) return undefined;
  const { viscosity, narrowed } = solved;
  if (viscosity === null && narrowed.length === 0) return undefined;
  return { viscosity_Pa_s: viscosity ?? undefined, narrowed: narrowed.length > 0 ? narrowed : undefined };
}
