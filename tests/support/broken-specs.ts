import type { BrokenSpec } from './bend-spec.ts';
import { BROKEN_JSON, WRONG_WHOLE, WRONG_WORDS } from './broken-json.ts';
import { WRONG_LAWS } from './broken-laws.ts';
import { WRONG_TISSUE } from './broken-tissues.ts';
import { WRONG_TREES } from './broken-trees.ts';

/** Every broken spec text of the corpus. */
export const BROKEN_SPECS: readonly BrokenSpec[] = [
  ...BROKEN_JSON,
  ...WRONG_WHOLE,
  ...WRONG_WORDS,
  ...WRONG_TISSUE,
  ...WRONG_TREES,
  ...WRONG_LAWS,
];
