import { checkTree } from './check/check-tree.ts';
import type { CheckResult } from './check/result.ts';
import { inputError } from './core/errors.ts';
import type { Watch } from './core/progress.ts';
import type { TriangleSurface } from './core/surface.ts';
import { solveWithEnds } from './flow/ends.ts';
import { narrowTube, withFlow } from './flow/narrow.ts';
import { measurePower } from './flow/power.ts';
import { solveFlow } from './flow/solve.ts';
import type { NamedBytes } from './formats/format.ts';
import type { MeshUnit } from './formats/mesh/length-unit.ts';
import { encodeMeshFolder } from './formats/mesh/mesh-folder.ts';
import { freezeGrowth } from './growth/freeze.ts';
import { type Growth, growForest } from './growth/grow.ts';
import type { Stopped } from './growth/grower.ts';
import { buildLumen } from './mesh/build-lumen.ts';
import { type CutOptions, cutField, cutForest, cutResistances } from './mesh/cut-forest.ts';
import type { LumenMesh } from './mesh/lumen.ts';
import { tubeWeights } from './refine/cost.ts';
import { type RelaxResult, relaxJunctions } from './refine/relax.ts';
import { buildReport } from './report/build.ts';
import type { PromiseLine, ReportInput } from './report/input.ts';
import type { Report } from './report/report.ts';
import type { Spec } from './spec/types.ts';
import { specToJson } from './spec/write.ts';
import { buildTissue } from './tissue/build-tissue.ts';
import type { Tissue } from './tissue/tissue.ts';
import type { FlowField, Forest, TreeRecord } from './tree/forest.ts';
import { strahlerOrders } from './tree/strahler.ts';
import { countVessels } from './tree/vessels.ts';

/** Version of the program, as written into every result. */
export const VERSION = '0.1.0';

/** What the budgets come to: most sweeps over all junctions, and the gain of a sweep below which it is enough. */
const BUDGETS = {
  none: { sweeps: 0, tolerance: 0 },
  quick: { sweeps: 20, tolerance: 1e-4 },
  thorough: { sweeps: 2000, tolerance: 1e-9 },
} as const;
/** Most sweeps that a spec may state, and so that a budget in seconds may come to. */
const MOST_SWEEPS = 10_000;
/** Up to so many explicit points, several orders of serving them are tried and the cheapest tree is kept. */
const FEW_POINTS = 64;
const ORDERS = 24;
/** Times that explicit points which were left out are tried again, first in line. */
const SECOND_TRIES = 4;

export interface GrowOptions extends Watch {
  /** Asked after each sweep of refinement: true ends it. How a budget in seconds comes in; the library has no clock. */
  readonly refineEnough?: (() => boolean) | undefined;
  /** Told the cost (W) as it falls. */
  readonly onCost?: ((stage: string, cost: number) => void) | undefined;
}

export interface GrowResult {
  /** The spec as used, so that it grows the same tree again: a budget in seconds has become a number of sweeps. */
  readonly spec: Spec;
  readonly record: TreeRecord;
  readonly tissue: Tissue;
  readonly check: CheckResult;
  readonly stopped: Stopped;
  /** What was asked and could not be done, a sentence each. */
  readonly shortfalls: readonly string[];
}

/**
 * The whole way from a spec to a solved and proved forest.
 *
 * @param surfaces triangle surfaces that the spec's tissue names, by their `file`, as read
 * @throws InputError for what only the tissue shows to be wrong (inlet outside, tissue too small, broken surface)
 */
export function growRun(
  spec: Spec,
  surfaces: ReadonlyMap<string, TriangleSurface>,
  options: GrowOptions = {},
): GrowResult {
  const tissue = buildTissue(spec.tissue, surfaces, spec.forbidden);
  const best = growBest(spec, tissue, options);
  const { grower } = best.growth;
  let stopped = best.growth.stopped;
  let refine: RelaxResult | null = best.refine;
  if (refine === null && stopped !== 'cancelled') {
    refine = refineGrowth(best.growth, spec, options);
    if (refine.stopped === 'cancelled') stopped = 'cancelled';
  }
  if (stopped !== 'cancelled') stopped = grower.finish();
  const used: Spec = options.refineEnough !== undefined && refine !== null ? { ...spec, refine: refine.sweeps } : spec;
  const forest = freezeGrowth(grower, spec);
  const record = solveRecord(forest, used);
  const check = checkTree(record, used, surfaces);
  const shortfalls: string[] = [];
  spec.trees.forEach((tree, t) => {
    const { demand } = grower.trees[t]!;
    if (demand.served < demand.wanted) {
      shortfalls.push(
        `tree ${tree.name} serves ${demand.served} of the ${demand.wanted} terminals asked for: no room was found for the rest`,
      );
    }
  });
  return { spec: used, record, tissue, check, stopped, shortfalls };
}

/** The solved record of a forest under a spec's pressures and blood. */
export function solveRecord(forest: Forest, spec: Spec): TreeRecord {
  const kinds = spec.trees.map((tree) => tree.kind);
  const field = solveFlow(forest, kinds, {
    rootPressures: spec.trees.map((tree) => tree.inlet.pressure),
    viscosity: spec.blood.viscosity.value,
    density: spec.blood.density,
  });
  return {
    forest,
    kinds,
    names: spec.trees.map((tree) => tree.name),
    field,
    order: strahlerOrders(forest),
    provenance: specToJson(spec, { version: VERSION }),
  };
}

/** What is done to a tree before its flow is solved again. */
export interface FlowChange {
  /** Pa·s, > 0; the spec's where left out. */
  readonly viscosity?: number | undefined;
  /** Tubes by row, and what is taken off their radius: above 0 and below 1. */
  readonly narrow?: readonly { readonly row: number; readonly fraction: number }[] | undefined;
}

/** A tree solved again. */
export interface FlowResult {
  /** The spec, with the viscosity used. */
  readonly spec: Spec;
  /** Null where flow would run backwards: a tree file holds no such flow. */
  readonly record: TreeRecord | null;
  /** Rows through which it would. */
  readonly reversed: readonly number[];
}

/**
 * Solves a grown tree again under another viscosity, or with vessels narrowed. With the viscosity alone, flows stay and
 * pressures follow. Where a vessel is narrowed, roots and terminals keep their pressures and flows follow.
 *
 * Cost: O(n)
 */
export function solveAgain(record: TreeRecord, spec: Spec, change: FlowChange): FlowResult {
  const viscosity = change.viscosity ?? spec.blood.viscosity.value;
  const used: Spec = { ...spec, blood: { ...spec.blood, viscosity: { law: 'constant', value: viscosity } } };
  const solved = solveRecord(record.forest, used);
  const narrow = change.narrow ?? [];
  if (narrow.length === 0) return { spec: used, record: solved, reversed: [] };
  let forest = record.forest;
  for (const { row, fraction } of narrow) forest = narrowTube(forest, row, 1 - fraction);
  const roots = spec.trees.map((tree) => tree.inlet.pressure);
  const { flow } = solveWithEnds(forest, roots, solved.field!.pressure, viscosity);
  const reversed: number[] = [];
  for (let i = 0; i < forest.count; i++) {
    if (!(flow[i]! * flow[forest.treeStart[forest.tree[i]!]!]! > 0)) reversed.push(i);
  }
  if (reversed.length > 0) return { spec: used, record: null, reversed };
  return { spec: used, record: solveRecord(withFlow(forest, flow), used), reversed };
}

export interface MeshOptions extends CutOptions {
  /** Segments round a vessel. */
  readonly around?: number | undefined;
  /** Unit of the surface files; metres where left out. */
  readonly unit?: MeshUnit | undefined;
}

export interface MeshResult {
  readonly mesh: LumenMesh;
  /** The files of a mesh folder. */
  readonly files: readonly NamedBytes[];
  /** Vessels that were meshed, and that were cut off. */
  readonly vessels: number;
  readonly removed: number;
}

/**
 * Meshes the lumen of a tree, or of its wider part.
 *
 * @param spec tells blood, and pressures where the record holds no solution; null where there is none
 * @throws InputError for options out of range, or a record with neither solution nor spec
 */
export function meshTree(record: TreeRecord, spec: Spec | null, options: MeshOptions = {}): MeshResult {
  const solved = record.field !== null || spec === null ? record : solveRecord(record.forest, spec);
  const { kinds, field: whole } = solved;
  if (whole === null) {
    throw inputError('no-flow', 'tree', 'got neither a flow solution nor a spec, expected one of them for the tables');
  }
  const { around, unit, keepAbove, keepOrder } = options;
  const cut =
    keepAbove === undefined && keepOrder === undefined ? null : cutForest(record.forest, { keepAbove, keepOrder });
  const forest = cut?.forest ?? record.forest;
  const field = cut === null ? whole : cutField(cut, whole);
  const mesh = buildLumen(forest, { around, kinds, vesselNumbers: cut?.vesselNumbers });
  const files = encodeMeshFolder({
    mesh,
    forest,
    field,
    kinds,
    unit,
    density: spec?.blood.density ?? densityOf(whole),
    viscosity: spec?.blood.viscosity.value ?? onlyValue(whole.viscosity),
    cut:
      cut === null
        ? undefined
        : {
            notes: { keepAbove: keepAbove ?? null, keepOrder: keepOrder ?? null, removed: cut.removed },
            source: cut.source,
            vesselNumbers: cut.vesselNumbers,
            resistances: cutResistances(cut, whole, field),
          },
    facts: {
      program: `vesselwright ${VERSION}`,
      name: spec?.name,
      seed: spec?.seed,
      sizing: spec?.sizing.rule,
      junction_exponent: spec === null || spec.sizing.rule === 'least-power' ? undefined : spec.sizing.exponent,
    },
  });
  return { mesh, files, vessels: countVessels(forest), removed: cut?.removed ?? 0 };
}

/** kg/m³, from the Reynolds number of the first vessel: Re = 2 ρ v r / μ. */
function densityOf(field: FlowField): number {
  return (field.reynolds[0]! * field.viscosity[0]!) / (2 * field.velocity[0]! * field.forest.radius[0]!);
}

/** The one value of a column, or null where there are several. */
function onlyValue(column: ArrayLike<number>): number | null {
  for (let i = 1; i < column.length; i++) if (column[i] !== column[0]) return null;
  return column[0]!;
}

/** What a report is made of: a run as grown, or a tree solved again, whose tissue may not be known. */
export type ReportedRun = Pick<GrowResult, 'spec' | 'record' | 'check' | 'shortfalls'> & {
  readonly tissue: Tissue | null;
};

/** The report of a run. */
export function reportRun(result: ReportedRun, resources: ReportInput['resources']): Report {
  const { spec, record, tissue, check, shortfalls } = result;
  const stubs = `the first vessel of a tree may lead in from outside the tissue`;
  return buildReport({
    program: `vesselwright ${VERSION}`,
    record,
    power: measurePower(record.forest, spec.blood.viscosity.value, spec.blood.maintenance),
    tissueVolume: tissue?.volume ?? null,
    askedPressures: spec.trees.map((tree) => tree.terminals.pressure),
    promises: promiseLines(check),
    notes: [...shortfalls, stubs],
    resources,
  });
}

/** A check's promises as lines of a report. */
export function promiseLines(check: CheckResult): PromiseLine[] {
  return check.promises.map((promise) => ({
    promise: promise.title,
    limit: `${promise.sense === 'at-least' ? '≥' : '≤'} ${shortNumber(promise.limit)}${unitText(promise.unit)}`,
    worst: promise.worst === null ? null : `${shortNumber(promise.worst)}${unitText(promise.unit)}`,
    where: promise.where,
    held: promise.held,
  }));
}

function shortNumber(value: number): string {
  return String(Number(value.toPrecision(4)));
}

function unitText(unit: string): string {
  return unit === '1' ? '' : ` ${unit}`;
}

/** Lowers the cost of a growth within the spec's budget. */
function refineGrowth(growth: Growth, spec: Spec, options: GrowOptions): RelaxResult {
  const { builder, room } = growth.grower;
  const budget = typeof spec.refine === 'number' ? { sweeps: spec.refine, tolerance: 0 } : BUDGETS[spec.refine];
  const timed = options.refineEnough !== undefined;
  const weight = tubeWeights(builder, spec);
  return relaxJunctions(builder, room, weight, {
    sweeps: timed ? MOST_SWEEPS : budget.sweeps,
    tolerance: timed ? 0 : budget.tolerance,
    onProgress: options.onProgress,
    signal: options.signal,
    enough: (_, cost) => {
      options.onCost?.('refine', cost);
      return options.refineEnough?.() ?? false;
    },
  });
}

/**
 * Grows once where sites are free; where points are given, again in other orders: the few-points problem is about
 * topology, and a point left out may be reached when it is served first.
 */
function growBest(spec: Spec, tissue: Tissue, options: GrowOptions): { growth: Growth; refine: RelaxResult | null } {
  const points = spec.trees.map((tree) => (tree.terminals.by === 'points' ? tree.terminals.points.length : 0));
  const few = !points.includes(0) && points.reduce((a, b) => a + b, 0) <= FEW_POINTS;
  let growth = growForest(spec, tissue, options);
  if (!points.some((count) => count > 0)) return { growth, refine: null };
  for (let again = 0; again < SECOND_TRIES && growth.stopped === 'no-room'; again++) {
    const next = growForest(spec, tissue, options, 0, leftOut(growth, spec));
    if (next.grower.served > growth.grower.served) growth = next;
  }
  if (!few || growth.stopped === 'cancelled') return { growth, refine: null };
  // A time or a number of sweeps is for the tree that is kept; the choice itself must come out the same again.
  const counted = options.refineEnough !== undefined || typeof spec.refine === 'number';
  const trial: Spec = counted ? { ...spec, refine: 'quick' } : spec;
  const trialOptions: GrowOptions = { ...options, refineEnough: undefined };
  let refine = refineGrowth(growth, trial, trialOptions);
  for (let salt = 1; salt < ORDERS; salt++) {
    const next = growForest(spec, tissue, options, salt);
    if (next.stopped === 'cancelled') break;
    const relaxed = refineGrowth(next, trial, trialOptions);
    const served = next.grower.served - growth.grower.served;
    if (served > 0 || (served === 0 && lastCost(relaxed) < lastCost(refine))) {
      growth = next;
      refine = relaxed;
    }
  }
  return { growth, refine: counted ? null : refine };
}

function lastCost(result: RelaxResult): number {
  return result.cost[result.cost.length - 1]!;
}

/** (trees) points of the spec that a growth left out. */
function leftOut(growth: Growth, spec: Spec): number[][] {
  return spec.trees.map((tree, t) => {
    if (tree.terminals.by !== 'points') return [];
    const { demand } = growth.grower.trees[t]!;
    const { points } = tree.terminals;
    return growth.grower
      .unserved(t)
      .map((site) =>
        points.findIndex(
          (point) =>
            point[0] === demand.siteX(site) && point[1] === demand.siteY(site) && point[2] === demand.siteZ(site),
        ),
      );
  });
}
