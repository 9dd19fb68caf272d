import type { TriangleSurface } from '../core/surface.ts';
import type { Spec } from '../spec/types.ts';
import type { TreeRecord } from '../tree/forest.ts';
import { measureConservation, measureService } from './blood.ts';
import { measureClearance } from './clearance.ts';
import { measureContainment } from './containment.ts';
import { measureShape, measureTissue, missingSurfaces, type Region } from './depth.ts';
import { measureField } from './field.ts';
import { measureJunctions } from './junctions.ts';
import { askedExponent, describeSizing, measureJunctionLaw, measureSizing, measureTerminalPressure } from './law.ts';
import { type Recomputed, recomputeFlow } from './recompute.ts';
import { type CheckResult, gatherResult, type PromiseResult, type Tally } from './result.ts';
import { type ChildLists, linkChildren, measureExtent, measureLengths } from './rows.ts';
import { inspectStructure, measureOrders } from './structure.ts';
import { measureTerritories } from './territories.ts';
import { createTreeTallies, type TreeTallies } from './tree-tallies.ts';

/** Figures that a report claims, as in `report.json`. */
export interface ClaimedCost {
  readonly pumping_W: number;
  readonly maintenance_W: number;
  readonly total_W: number;
}

export interface CheckTreeOptions {
  /** Cost claimed by the run's report, to be compared with the recomputed one. */
  readonly claimed?: ClaimedCost | null | undefined;
  /** Findings listed a promise, ≥ 0; default 20. */
  readonly cap?: number | undefined;
}

/**
 * Recomputes every promise a tree makes, from the tree alone.
 *
 * @param record   any tree; nothing is assumed of it
 * @param spec     what was asked for, or null: promises that need it are then said to be unchecked
 * @param surfaces surfaces that the spec's tissue names, by their `file`, in the file's own unit
 * Lengths are compared with a slack of 1e-9 of the tissue's (or the tree's) size.
 */
export function checkTree(
  record: TreeRecord,
  spec: Spec | null,
  surfaces: ReadonlyMap<string, TriangleSurface>,
  options: CheckTreeOptions = {},
): CheckResult {
  const { forest } = record;
  const cap = options.cap ?? 20;
  const lacking =
    spec === null ? [] : [spec.tissue, ...spec.forbidden].flatMap((shape) => missingSurfaces(shape, surfaces));
  const tissue = spec === null || lacking.length > 0 ? null : measureTissue(spec.tissue, spec.forbidden, surfaces);
  const size =
    tissue === null
      ? measureExtent(forest)
      : Math.hypot(tissue.max[0] - tissue.min[0], tissue.max[1] - tissue.min[1], tissue.max[2] - tissue.min[2]);
  const tallies = createTreeTallies(record, spec, size, cap);
  const promises: PromiseResult[] = [];
  const sharing = spec?.trees.some((tree) => tree.terminals.byTerritory) ?? false;
  const all = (Object.values(tallies) as Tally[]).filter((tally) => sharing || tally !== tallies.territory);

  const length = measureLengths(forest);
  const sound = inspectStructure(record, spec, length, tallies.structure);
  promises.push(tallies.structure.close());
  if (!sound) {
    const rest = all.filter((tally) => tally !== tallies.structure);
    promises.push(...rest.map((tally) => tally.skip('the rows are not a forest of trees')));
    return gatherResult(promises, all, [], {});
  }
  const children = linkChildren(forest);
  measureOrders(record, tallies.orders);
  promises.push(tallies.orders.close());

  if (tissue === null) {
    promises.push(tallies.containment.skip(spec === null ? 'no spec' : `no surface given for ${lacking.join(', ')}`));
  } else {
    const stubs = findStubs(record, tissue.depth, size);
    measureContainment(forest, tissue, stubs.skip, tallies.containment);
    promises.push(tallies.containment.close(`${stubs.note}slack 1e-9 of the tissue's size`));
  }

  // The first reach is about the distance between neighbours; it is only for naming the closest pair.
  const nearest = size / Math.cbrt(forest.count);
  const whole = measureClearance(forest, spec?.clearance.gap ?? 0, nearest, tallies.clearance);
  promises.push(
    tallies.clearance.close(
      `${spec === null ? 'no spec, so no gap is asked; ' : ''}` +
        (whole ? '' : 'broken off: more pairs break it than can be counted in reasonable time; ') +
        (tallies.clearance.checked === 0 ? 'no pair comes near; ' : '') +
        'counted are the pairs near enough to matter; slack 1e-9 of the size',
    ),
  );
  measureJunctions(forest, children, length, tallies);
  promises.push(tallies.separation.close(), tallies.angle.close(spec === null ? 'no spec, so no angle is asked' : ''));
  promises.push(
    tallies.length.close('room: the ball in which the vessels of a junction part; twice the radius at an end'),
  );

  const recomputed = recomputeFlow(record, spec, length);
  checkLaw(record, spec, children, recomputed, tallies, promises);
  const terminals = checkBlood(record, spec, children, size, tallies, promises);
  if (spec !== null && sharing)
    checkTerritories(record, spec, terminals, tissue, surfaces, tallies.territory, promises);

  const warnings = recomputed === null ? [] : measureField(record, spec, recomputed, tallies, cap);
  const fieldTallies = [tallies.pressure, tallies.viscosity, tallies.velocity, tallies.wallShear, tallies.transit];
  for (const tally of fieldTallies) {
    promises.push(record.field === null ? tally.skip('the file holds no flow solution') : tally.close());
  }
  promises.push(
    record.field === null || spec === null
      ? tallies.reynolds.skip(spec === null ? 'no spec, so no density' : 'the file holds no flow solution')
      : tallies.reynolds.close(warnings.length > 0 ? `warning: above 2000 in ${warnings.length} or more vessels` : ''),
  );
  const figures = checkCost(spec, recomputed, options.claimed ?? null, tallies.cost, promises);
  return gatherResult(promises, all, warnings, figures);
}

/** How long a stub may be: this share of the tissue's size outside it, and so many radii to come in at a slant. */
const OUTSIDE = 0.1;
const SLANT = 20;

/**
 * Inlet stubs: of a first vessel whose root lies no deeper than its radius, the stretch until the axis is first as deep
 * as the radius. A stretch that is longer than a stub may be, or that leaves the tissue again, is none: the whole vessel
 * is then looked at.
 */
function findStubs(
  record: TreeRecord,
  depth: (x: number, y: number, z: number) => number,
  size: number,
): { skip: Map<number, number>; note: string } {
  const { treeStart, position: p, radius } = record.forest;
  const skip = new Map<number, number>();
  const told: string[] = [];
  for (let t = 0; t + 1 < treeStart.length; t++) {
    const root = treeStart[t]!;
    const r = radius[root]!;
    const [x, y, z] = [p[3 * root]!, p[3 * root + 1]!, p[3 * root + 2]!];
    const [ux, uy, uz] = [p[3 * root + 3]! - x, p[3 * root + 4]! - y, p[3 * root + 5]! - z];
    const length = Math.hypot(ux, uy, uz);
    let inside = false;
    for (let s = 0; s <= Math.min(length, OUTSIDE * size + SLANT * r); ) {
      const here = depth(x + (s / length) * ux, y + (s / length) * uy, z + (s / length) * uz);
      if (here >= r * (1 - 1e-9)) {
        if (s > 0) {
          skip.set(root + 1, s);
          told.push(`the first ${Number((s * 1e6).toPrecision(4))} µm of ${record.names[t] ?? t}`);
        }
        break;
      }
      if (inside && here < 0) break;
      inside ||= here > 0;
      // Small steps, so that a thin part that is crossed is not stepped over.
      s += 0.04 * r;
    }
  }
  return { skip, note: told.length === 0 ? '' : `exempt: the inlet stub, ${told.join(', ')}; ` };
}

function checkLaw(
  record: TreeRecord,
  spec: Spec | null,
  children: ChildLists,
  recomputed: Recomputed | null,
  tallies: TreeTallies,
  promises: PromiseResult[],
): void {
  const { law, sizing, terminalPressure } = tallies;
  if (spec === null || recomputed === null) {
    promises.push(...[law, sizing, terminalPressure].map((tally) => tally.skip('no spec')));
    return;
  }
  const exponent = askedExponent(spec);
  measureJunctionLaw(record.forest, children, exponent, law);
  promises.push(law.close(`exponent ${exponent}; bends keep their radius`));
  if (spec.sizing.rule === 'pressure-matched') {
    promises.push(sizing.skip('the rule is the terminal pressure'));
    measureTerminalPressure(record.forest, children, spec, recomputed, terminalPressure);
    promises.push(terminalPressure.close());
    return;
  }
  measureSizing(record.forest, children, spec, recomputed, sizing);
  const rule = describeSizing(spec);
  promises.push(sizing.close(rule), terminalPressure.skip('the sizing rule asks for none'));
}

function checkBlood(
  record: TreeRecord,
  spec: Spec | null,
  children: ChildLists,
  size: number,
  tallies: TreeTallies,
  promises: PromiseResult[],
): readonly (readonly number[])[] {
  measureConservation(record, children, tallies.conservation);
  promises.push(tallies.conservation.close());
  const service = [tallies.inlet, tallies.shares, tallies.terminals];
  if (spec === null) {
    promises.push(...service.map((tally) => tally.skip('no spec')));
    return [];
  }
  const trees = Math.min(record.forest.treeStart.length - 1, spec.trees.length);
  const terminals: (readonly number[])[] = [];
  for (let t = 0; t < trees; t++) terminals.push(measureService(record, children, t, spec.trees[t]!, size, tallies));
  const untold = spec.trees.some((tree) => tree.terminals.byTerritory) && !record.territory;
  const note = 'the file tells no territories, so flows are held only to those measured again';
  promises.push(
    tallies.inlet.close(),
    untold && tallies.shares.checked === 0 ? tallies.shares.skip(note) : tallies.shares.close(untold ? note : ''),
    tallies.terminals.close(),
  );
  return terminals;
}

/** Trees whose flow is shared by territory, against territories measured again. */
function checkTerritories(
  record: TreeRecord,
  spec: Spec,
  terminals: readonly (readonly number[])[],
  tissue: Region | null,
  surfaces: ReadonlyMap<string, TriangleSurface>,
  tally: Tally,
  promises: PromiseResult[],
): void {
  const demand = spec.demand ?? [];
  const lacking = [spec.tissue, ...spec.forbidden, ...demand.map((part) => part.shape)].flatMap((shape) =>
    missingSurfaces(shape, surfaces),
  );
  if (tissue === null || lacking.length > 0) {
    promises.push(tally.skip(`no surface given for ${lacking.join(', ')}`));
    return;
  }
  const parts = demand.map(({ shape, weight }) => ({ region: measureShape(shape, surfaces), weight }));
  const notes: string[] = [];
  terminals.forEach((rows, t) => {
    const shared = spec.trees[t]!.terminals.byTerritory === true;
    if (shared) notes.push(`${record.names[t]}: ${measureTerritories(record, rows, tissue, parts, tally)}`);
    if (record.territory) judgeOthers(record, t, shared ? rows : [], tally);
  });
  promises.push(tally.close(notes.join('; ')));
}

/** Territories belong to terminals of trees that are asked for them, and to nothing else. */
function judgeOthers(record: TreeRecord, t: number, terminals: readonly number[], tally: Tally): void {
  const { treeStart } = record.forest;
  let next = 0;
  for (let i = treeStart[t]! + 1; i < treeStart[t + 1]!; i++) {
    if (i === terminals[next]) next++;
    else if (record.territory![i] !== 0) {
      tally.fail(
        tally.head.nameOf(i),
        i,
        Number.POSITIVE_INFINITY,
        1,
        'has a territory, but is no terminal that shares by it',
      );
    }
  }
}

function checkCost(
  spec: Spec | null,
  recomputed: Recomputed | null,
  claimed: ClaimedCost | null,
  tally: Tally,
  promises: PromiseResult[],
): Record<string, number> {
  if (recomputed === null) {
    promises.push(tally.skip('neither spec nor file says the viscosity'));
    return {};
  }
  const figures: Record<string, number> = {
    pumping_W: recomputed.pumping,
    volume_m3: recomputed.volume,
    drop_Pa: recomputed.drop,
  };
  if (spec === null) {
    promises.push(tally.skip('no spec, so no maintenance power'));
    return figures;
  }
  const maintenance = spec.blood.maintenance * recomputed.volume;
  figures.maintenance_W = maintenance;
  figures.total_W = recomputed.pumping + maintenance;
  if (claimed === null) {
    promises.push(tally.skip('no report to compare with'));
    return figures;
  }
  for (const key of ['pumping_W', 'maintenance_W', 'total_W'] as const) {
    const wanted = figures[key]!;
    const off = Math.abs(claimed[key] - wanted) / wanted;
    tally.checked++;
    if (!(off <= tally.head.limit)) {
      tally.fail(key, -1, off, tally.head.limit, `${key}: the report says ${claimed[key]}, recomputed ${wanted}`);
    } else if (!(off <= tally.worst)) tally.worst = off;
  }
  promises.push(tally.close());
  return figures;
}
