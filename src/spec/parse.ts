import { type Fault, InputError, InvariantError } from '../core/errors.ts';
import { NOT_BUILT } from './got.ts';
import { MOST_NESTED, readJsonText } from './json-text.ts';
import { formatPath } from './path.ts';
import { resolveSpec } from './resolve.ts';
import { judgeTogether } from './rules.ts';
import { SPEC } from './schema.ts';
import type { Spec } from './types.ts';

/** More faults than anybody reads; the rest are counted. */
const MOST_FAULTS = 500;

/**
 * The spec a JSON text states.
 *
 * @param text  JSON (RFC 8259), a byte order mark at the start is passed over
 * @param where name of the text in faults of its JSON, e.g. the file's path
 * @throws  InputError with every fault: broken JSON as `where:line:column`, all others by spec path
 */
export function parseSpec(text: string, where = 'spec'): Spec {
  const { value, faults } = readJsonText(text, where);
  return specOf(value, faults);
}

/**
 * The spec a value states, as `JSON.parse` gives it.
 *
 * @throws  InputError with every fault
 */
export function specFromValue(value: unknown): Spec {
  return specOf(value, []);
}

function specOf(value: unknown, before: readonly Fault[]): Spec {
  const tooDeep = judgeDepth(value);
  if (tooDeep) throw new InputError([tooDeep]);
  const judged = SPEC.safeParse(value, { reportInput: true });
  const faults = [...before, ...(judged.success ? [] : judged.error.issues.map(faultOf)), ...judgeTogether(value)];
  if (faults.length > 0) throw new InputError(shorten(faults));
  if (!judged.success) throw new InvariantError('specOf: the schema refused a value and named no fault');
  return resolveSpec(judged.data);
}

interface Issue {
  readonly code?: string | undefined;
  readonly path: readonly PropertyKey[];
  readonly message: string;
  readonly input?: unknown;
  readonly params?: Readonly<Record<string, unknown>> | undefined;
}

function faultOf(issue: Issue): Fault {
  const missesShape = issue.code === 'invalid_union' && 'discriminator' in issue;
  return {
    code: codeOf(issue),
    where: formatPath(missesShape ? atShape(issue.path) : issue.path),
    message: issue.message,
  };
}

/** The path of the key `shape`, which the library appends in some cases and not in others. */
function atShape(path: readonly PropertyKey[]): readonly PropertyKey[] {
  return path[path.length - 1] === 'shape' ? path : [...path, 'shape'];
}

function codeOf(issue: Issue): string {
  if (issue.message.endsWith(NOT_BUILT)) return 'not-built';
  if (typeof issue.params?.code === 'string') return issue.params.code;
  if (issue.input === undefined) return 'missing';
  if (issue.code === 'invalid_type') return 'wrong-type';
  if (issue.code === 'too_small' || issue.code === 'too_big') return 'out-of-range';
  return 'bad-value';
}

function shorten(faults: readonly Fault[]): readonly Fault[] {
  if (faults.length <= MOST_FAULTS) return faults;
  const rest = faults.length - MOST_FAULTS;
  const message = `got ${rest} more faults, expected none; mend the first ${MOST_FAULTS} and look again`;
  return [...faults.slice(0, MOST_FAULTS), { code: 'more-faults', where: 'spec', message }];
}

/** A value nested beyond sense, or into itself, is refused before anything recurses over it. */
function judgeDepth(value: unknown): Fault | undefined {
  const message = `got lists and objects more than ${MOST_NESTED} deep, expected at most ${MOST_NESTED}`;
  let level: readonly object[] = typeof value === 'object' && value !== null ? [value] : [];
  for (let depth = 0; level.length > 0; depth++) {
    if (depth > MOST_NESTED) return { code: 'too-deep', where: 'spec', message };
    const next = new Set<object>();
    for (const one of level) {
      for (const inner of Object.values(one)) if (typeof inner === 'object' && inner !== null) next.add(inner);
    }
    level = [...next];
  }
  return undefined;
}
