import type { Tolerance } from './tolerance.ts';

/**
 * `identical`: the same bytes, or, where bytes were not given, the same in every bit of every column;
 * `equivalent`: the same tree within the tolerances; `different`: neither.
 */
export type Verdict = 'identical' | 'equivalent' | 'different';

/** Where two trees first disagree. */
export interface Difference {
  /** `topology` or the title of a quantity; of a quantity that only one side has, rows are −1 and vessels `–`. */
  readonly what: string;
  /** Vessels `<tree>:<vessel number>` in A and in B. */
  readonly vesselA: string;
  readonly vesselB: string;
  /** Rows of the forests, −1 where there is none. */
  readonly rowA: number;
  readonly rowB: number;
  /** Values as text with unit. */
  readonly valueA: string;
  readonly valueB: string;
  /** One sentence with all of it. */
  readonly message: string;
}

/** How one quantity compares over all matched vessels. */
export interface QuantitySummary {
  readonly key: string;
  readonly title: string;
  readonly unit: string;
  readonly relative: boolean;
  readonly tolerance: number;
  /** Vessels or nodes compared; 0 where A or B lacks the quantity. */
  readonly compared: number;
  /** Side that lacks what the other has, which is a difference; null where both or neither have it, or it is skipped. */
  readonly lacking: 'A' | 'B' | null;
  /** Why it is not compared and that is no difference, e.g. `not held by .swc`; null where it is compared or lacking. */
  readonly skipped: string | null;
  /** How many differ by more than the tolerance. */
  readonly exceeded: number;
  /** Greatest difference in `unit`, and relative to the larger value. */
  readonly maxAbsolute: number;
  readonly maxRelative: number;
  /** Vessels of the greatest difference (relative or absolute, as the tolerance is); null where there is none. */
  readonly vesselA: string | null;
  readonly vesselB: string | null;
}

/** What the file that one side was read from cannot hold. */
export interface FileLimits {
  /** The file's kind, as notes call it, e.g. `.swc`. */
  readonly name: string;
  /** Parts of a tree, as in `Quantity`. */
  readonly drops: readonly string[];
}

/** Plain figures of one side. */
export interface TreeCounts {
  readonly trees: number;
  readonly vessels: number;
  readonly terminals: number;
  readonly bends: number;
  /** m, all vessels. */
  readonly length_m: number;
  /** m³, all vessels. */
  readonly volume_m3: number;
}

/** Two trees compared vessel by vessel. */
export interface TreeComparison {
  readonly level: 'tree';
  readonly verdict: Verdict;
  /** What `identical` was asked of: the bytes of two files, or every value. */
  readonly identity: 'bytes' | 'values';
  /** Of what kind the difference is; null where there is none. Trees of other shape are `topology` whatever else differs. */
  readonly reason: 'topology' | 'values' | null;
  /** The first place, in A's order, where anything differs by more than its tolerance. */
  readonly first: Difference | null;
  /** The first place where the shapes part. */
  readonly firstShape: Difference | null;
  readonly countsA: TreeCounts;
  readonly countsB: TreeCounts;
  /** Vessels of A that have a partner in B. */
  readonly matched: number;
  readonly quantities: readonly QuantitySummary[];
  readonly tolerance: Tolerance;
  /** What was not compared, and other remarks. */
  readonly notes: readonly string[];
}

/** Any comparison; ensembles of trees will be another level. */
export type Comparison = TreeComparison;
