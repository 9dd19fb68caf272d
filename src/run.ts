import { checkTree } from './check/check-tree.ts';
import type { CheckResult } from './check/result.ts';
import { type Fault, InputError } from './core/errors.ts';
import { randomStream } from './core/random.ts';
import type { Reals } from './core/reals.ts';
import type { TriangleSurface } from './core/surface.ts';
import { solveFlow } from './flow/solve.ts';
import { freezeWithTerritories } from './growth/freeze.ts';
import { type Growth, growForest } from './growth/grow.ts';
import type { Stopped } from './growth/grower.ts';
import type { GrowthOptions } from './growth/options.ts';
import { saveGrown } from './growth/snapshot.ts';
import { costOf, tubeWeights } from './refine/cost.ts';
import { type Budget, type RefineResult, refineForest } from './refine/refine.ts';
import type { Spec, TreeSpec } from './spec/types.ts';
import { specToJson } from './spec/write.ts';
import { buildTissue } from './tissue/build-tissue.ts';
import type { Tissue } from './tissue/tissue.ts';
import type { Forest, TreeRecord } from './tree/forest.ts';
import { strahlerOrders } from './tree/strahler.ts';

/** Version of the program, as written into every result. */
export const VERSION = '0.1.0';

/** Most steps that a spec may state, and so that a budget in seconds may come to. */
const MOST_STEPS = 10_000;
/** Up to so many explicit points, several orders of serving them are tried and the cheapest tree is kept. */
const FEW_POINTS = 64;
const ORDERS = 24;
/** Streams of sites tried anew where a growth has served less than a fair part of what was asked for. */
const OTHER_SITES = 3;
const FAIR_PART = 0.9;
/** Times that explicit points which were left out are tried again, first in line. */
const SECOND_TRIES = 4;

export interface GrowOptions extends GrowthOptions {
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
  const tissue = buildTissue(spec.tissue, surfaces, spec.forbidden, spec.demand);
  refusePointsOutside(spec, tissue);
  const best = growBest(spec, tissue, {
    ...options,
    onForest: (builder) => options.onCost?.('growth', costOf(builder, tubeWeights(builder, spec))),
  });
  const { grower } = best.growth;
  let stopped = best.growth.stopped;
  let refine: RefineResult | null = best.refine;
  if (refine === null && stopped !== 'cancelled') {
    refine = refineGrowth(best.growth, spec, options);
    if (refine.stopped === 'cancelled') stopped = 'cancelled';
  }
  if (stopped !== 'cancelled') stopped = grower.finish();
  const used: Spec = options.refineEnough !== undefined && refine !== null ? { ...spec, refine: refine.steps } : spec;
  options.onProgress?.({ stage: 'flow', done: 0, total: 1 });
  const { forest, territory } = freezeWithTerritories(grower, spec);
  const record = solveRecord(forest, used, territory);
  options.onProgress?.({ stage: 'check', done: 0, total: 1 });
  const check = checkTree(record, used, surfaces);
  const shortfalls = spec.trees.flatMap((tree, t) => tellUnserved(tree, t, grower));
  return { spec: used, record, tissue, check, stopped, shortfalls };
}

/** Sites named when they could not be served; the rest are counted. */
const MOST_NAMED = 8;

/** What a tree was asked and does not serve, in a sentence, or nothing. */
function tellUnserved(tree: TreeSpec, t: number, grower: Growth['grower']): string[] {
  const { demand } = grower.trees[t]!;
  if (demand.served >= demand.wanted) return [];
  const count = `tree ${tree.name} serves ${demand.served} of the ${demand.wanted} terminals asked for: no room was found for the rest`;
  // By count one place is as good as another, so none of them is missing.
  if (tree.terminals.by === 'count') return [count];
  const sites = grower.unserved(t);
  const millimetres = (x: number) => Number((1e3 * x).toPrecision(4));
  const named = sites
    .slice(0, MOST_NAMED)
    .map((site) => `(${[demand.siteX(site), demand.siteY(site), demand.siteZ(site)].map(millimetres).join(', ')})`);
  const more = sites.length > MOST_NAMED ? ` and ${sites.length - MOST_NAMED} more` : '';
  return [`${count}, at ${named.join(', ')}${more}, in mm`];
}

/** A point that no terminal could ever reach is the caller's fault, each named. */
function refusePointsOutside(spec: Spec, tissue: Tissue): void {
  const faults: Fault[] = [];
  spec.trees.forEach((tree, t) => {
    if (tree.terminals.by !== 'points') return;
    tree.terminals.points.forEach(([x, y, z], k) => {
      const depth = tissue.depth(x, y, z);
      if (depth > 0) return;
      const got = depth === 0 ? 'on the boundary' : `${Number((-1e6 * depth).toPrecision(4))} µm outside`;
      faults.push({
        code: 'point-outside',
        where: `trees[${t}].terminals.points[${k}]`,
        message: `got a point ${got} of the tissue, expected one inside`,
      });
    });
  });
  if (faults.length > 0) throw new InputError(faults);
}

/**
 * The solved record of a forest under a spec's pressures and blood.
 *
 * @param territory (n) m³, of terminals whose territory was measured; see `TreeRecord`
 */
export function solveRecord(forest: Forest, spec: Spec, territory: Reals | null = null): TreeRecord {
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
    ...(territory === null ? {} : { territory }),
    provenance: specToJson(spec, { version: VERSION }),
  };
}

/** Lowers the cost of a growth within the spec's budget. */
function refineGrowth(growth: Growth, spec: Spec, options: GrowOptions): RefineResult {
  const { builder, room } = growth.grower;
  const timed = options.refineEnough !== undefined;
  return refineForest(builder, room, spec, {
    budget: timed ? { kind: 'steps', steps: MOST_STEPS } : budgetOf(spec),
    crew: options.crew,
    onProgress: options.onProgress,
    signal: options.signal,
    onMoment: (save) =>
      options.onMoment?.((out) => {
        saveGrown(out, growth.grower, growth, growth.stopped);
        save(out.within('refiner'));
      }),
    resume: growth.restored ? options.resume?.within('refiner') : undefined,
    enough: (_, cost) => {
      options.onCost?.('refine', cost);
      return options.refineEnough?.() ?? false;
    },
  });
}

function budgetOf(spec: Spec): Budget {
  const { refine } = spec;
  if (typeof refine === 'number') return refine === 0 ? { kind: 'none' } : { kind: 'steps', steps: refine };
  return refine === 'annealed' ? { kind: refine, random: randomStream(spec.seed, 'annealing') } : { kind: refine };
}

/**
 * Grows once where sites are free; where points are given, again in other orders: the few-points problem is about
 * topology, and a point left out may be reached when it is served first.
 */
function growBest(spec: Spec, tissue: Tissue, options: GrowOptions): { growth: Growth; refine: RefineResult | null } {
  const points = spec.trees.map((tree) => (tree.terminals.by === 'points' ? tree.terminals.points.length : 0));
  const few = !points.includes(0) && points.reduce((a, b) => a + b, 0) <= FEW_POINTS;
  // What is tried and compared is not saved: these growths are begun again, from the first one where that is large.
  const unsaved: GrowOptions = { ...options, onMoment: undefined, resume: undefined };
  let growth = growForest(spec, tissue, few ? { ...options, onMoment: undefined } : options);
  if (growth.restored) return { growth, refine: null };
  if (!points.some((count) => count > 0)) {
    // In a narrow tissue the first vessels may stand in the way of all others; other places may come first.
    const wanted = growth.grower.trees.reduce((sum, { demand }) => sum + demand.wanted, 0);
    for (let salt = 1; salt <= OTHER_SITES && growth.stopped === 'no-room'; salt++) {
      if (growth.grower.served >= FAIR_PART * wanted) break;
      const next = growForest(spec, tissue, unsaved, salt);
      if (next.stopped === 'cancelled' || next.grower.served > growth.grower.served) growth = next;
    }
    return { growth, refine: null };
  }
  for (let again = 0; again < SECOND_TRIES && growth.stopped === 'no-room'; again++) {
    const next = growForest(spec, tissue, unsaved, 0, leftOut(growth, spec));
    if (next.grower.served > growth.grower.served) growth = next;
  }
  if (!few || growth.stopped === 'cancelled') return { growth, refine: null };
  // A time or a number of sweeps is for the tree that is kept; the choice itself must come out the same again.
  const counted = options.refineEnough !== undefined || typeof spec.refine === 'number';
  const trial: Spec = counted ? { ...spec, refine: 'quick' } : spec;
  const trialOptions: GrowOptions = { ...unsaved, refineEnough: undefined };
  let refine = refineGrowth(growth, trial, trialOptions);
  for (let salt = 1; salt < ORDERS; salt++) {
    const next = growForest(spec, tissue, unsaved, salt);
    if (next.stopped === 'cancelled') break;
    const relaxed = refineGrowth(next, trial, trialOptions);
    const served = next.grower.served - growth.grower.served;
    if (served > 0 || (served === 0 && relaxed.after < refine.after)) {
      growth = next;
      refine = relaxed;
    }
  }
  return { growth, refine: counted ? null : refine };
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
