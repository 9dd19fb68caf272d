import { type CheckTreeOptions, checkTree } from './check/check-tree.ts';
import type { CheckResult } from './check/result.ts';
import { inputError } from './core/errors.ts';
import type { TriangleSurface } from './core/surface.ts';
import { fromSi } from './core/units.ts';
import { solveWithEnds } from './flow/ends.ts';
import { narrowTube, withFlow } from './flow/narrow.ts';
import { solveRecord, VERSION } from './run.ts';
import { type SolvedAgain, solvedAgainOf, VISCOSITY_RANGE } from './spec/solved-again.ts';
import type { Spec } from './spec/types.ts';
import { specToJson } from './spec/write.ts';
import type { TreeRecord } from './tree/forest.ts';
import { vesselName } from './tree/vessels.ts';

/*
 * What is run on a tree that stands, grown here or read from a file: its flow solved again, its promises checked.
 */

/** What is done to a tree before its flow is solved again. */
export interface FlowChange {
  /** Pa·s, > 0; that of the solution before where left out. */
  readonly viscosity?: number | undefined;
  /** Tubes by row, and what is taken off their radius: above 0 and below 1. */
  readonly narrow?: readonly { readonly row: number; readonly fraction: number }[] | undefined;
}

/** A tree solved again. */
export interface FlowResult {
  /** The spec with the viscosity used: what the solution is judged by. */
  readonly spec: Spec;
  /** Null where flow would run backwards: a tree file holds no such flow. Its provenance is the spec as grown. */
  readonly record: TreeRecord | null;
  /** All that was changed since the tree was grown; null where nothing was. */
  readonly solvedAgain: SolvedAgain | null;
  /** Rows through which flow would run backwards. */
  readonly reversed: readonly number[];
}

/**
 * Solves a grown tree again under another viscosity, or with vessels narrowed. With the viscosity alone, flows stay and
 * pressures follow. Where a vessel is narrowed, roots and terminals keep their pressures and flows follow.
 *
 * @param spec as grown; what was changed since then stands in the record's provenance and is kept
 * @throws InputError for a viscosity that no spec may state
 * Cost: O(n)
 */
export function solveAgain(record: TreeRecord, spec: Spec, change: FlowChange): FlowResult {
  const before = solvedAgainOf(record.provenance);
  const narrow = change.narrow ?? [];
  const viscosity = change.viscosity ?? before?.viscosity ?? spec.blood.viscosity.value;
  const { min, max } = VISCOSITY_RANGE;
  if (!(viscosity >= min && viscosity <= max)) {
    throw inputError('out-of-range', 'viscosity', `got ${viscosity} Pa·s, expected ${min} to ${max} Pa·s`);
  }
  const changes: SolvedAgain = {
    viscosity: viscosity === spec.blood.viscosity.value ? null : viscosity,
    narrowed: [
      ...(before?.narrowed ?? []),
      ...narrow.map(({ row, fraction }) => ({ vessel: vesselName(record.forest, record.names, row), fraction })),
    ],
  };
  const solvedAgain = changes.viscosity === null && changes.narrowed.length === 0 ? null : changes;
  const used = specAsSolved(spec, solvedAgain);
  const provenance = specToJson(spec, { version: VERSION, solvedAgain });
  const solved = solveRecord(record.forest, used, record.territory ?? null);
  if (narrow.length === 0) return { spec: used, record: { ...solved, provenance }, solvedAgain, reversed: [] };
  let forest = record.forest;
  for (const { row, fraction } of narrow) forest = narrowTube(forest, row, 1 - fraction);
  const roots = spec.trees.map((tree) => tree.inlet.pressure);
  const { flow } = solveWithEnds(forest, roots, solved.field!.pressure, viscosity);
  const reversed: number[] = [];
  for (let i = 0; i < forest.count; i++) {
    if (!(flow[i]! * flow[forest.treeStart[forest.tree[i]!]!]! > 0)) reversed.push(i);
  }
  if (reversed.length > 0) return { spec: used, record: null, solvedAgain, reversed };
  const after = solveRecord(withFlow(forest, flow), used, record.territory ?? null);
  return { spec: used, record: { ...after, provenance }, solvedAgain, reversed };
}

/** The spec with the viscosity that the flow was solved with last. */
export function specAsSolved(spec: Spec, solvedAgain: SolvedAgain | null): Spec {
  const value = solvedAgain?.viscosity ?? spec.blood.viscosity.value;
  return { ...spec, blood: { ...spec.blood, viscosity: { law: 'constant', value } } };
}

/** Changes after growth, a phrase each. */
export function describeChanges(solvedAgain: SolvedAgain | null): string[] {
  if (solvedAgain === null) return [];
  const { viscosity, narrowed } = solvedAgain;
  const short = (value: number) => Number(value.toPrecision(6));
  return [
    ...(viscosity === null ? [] : [`solved with a viscosity of ${short(fromSi(viscosity, 'mPa_s'))} mPa·s`]),
    ...narrowed.map(({ vessel, fraction }) => `${vessel} narrowed: ${short(100 * fraction)} % of its radius taken off`),
  ];
}

/**
 * `checkTree` of a tree whose flow may have been solved again: promises that what was changed necessarily breaks are said
 * to be unchecked, viscosities are held to the one it was solved with, all else is as strict as ever.
 */
export function checkRun(
  record: TreeRecord,
  spec: Spec | null,
  surfaces: ReadonlyMap<string, TriangleSurface>,
  options: CheckTreeOptions = {},
): CheckResult {
  const solvedAgain = solvedAgainOf(record.provenance);
  if (spec === null || solvedAgain === null) return checkTree(record, spec, surfaces, options);
  const result = checkTree(record, specAsSolved(spec, solvedAgain), surfaces, options);
  const lapsed = lapsedPromises(spec, solvedAgain);
  const note = `not checked: changed after growth (flow: ${describeChanges(solvedAgain).join('; ')})`;
  const promises = result.promises.map((promise) =>
    lapsed.has(promise.id) && promise.held !== null
      ? { ...promise, worst: null, where: null, held: null, checked: 0, failures: 0, note }
      : promise,
  );
  return {
    ...result,
    held: promises.every((promise) => promise.held !== false),
    promises,
    findings: result.findings.filter((finding) => !lapsed.has(finding.promise)),
  };
}

/** Ids of promises that cannot be kept by a tree that was changed so. */
function lapsedPromises(spec: Spec, { viscosity, narrowed }: SolvedAgain): ReadonlySet<string> {
  const lapsed: string[] = [];
  // Ends keep their pressures where a vessel is narrowed, but radii leave the law, and flows those asked for.
  if (narrowed.length > 0) lapsed.push('junction-law', 'sizing', 'inlet-flow', 'terminal-flow', 'territory');
  if (viscosity !== null) {
    const { sizing } = spec;
    lapsed.push('terminal-pressure');
    if (sizing.rule === 'least-power') lapsed.push('sizing');
    if (sizing.rule === 'junction-exponent' && sizing.scale.by === 'mean-pressure') lapsed.push('sizing');
  }
  return new Set(lapsed);
}
