/*
 * What refinement gains, what clearance costs, and how near junctions come to their best angles.
 *   node tests/bench/run.mjs refine [-- gain | price | angles | long | quick …]
 *     gain    no clearance (first vessel 1 µm), 1,000 terminals: cost after growth, and after each budget
 *     price   10,000 terminals in an ellipsoid at 5 % vessel volume, over the same sites with hair-thin vessels, both
 *             refined thoroughly (the latter for at most 90 s)
 *     angles  2,000 terminals refined thoroughly, hair-thin and at 2 % vessel volume
 *     long    gain with 60 s for each budget that takes a time
 *     quick   all three, small
 * Costs are Σ Q^(2/3) L in mm, Q in shares of the inlet flow. Seconds are of the processor; budgets go by them too.
 */
import { randomStream } from '../../src/core/random.ts';
import { Demand } from '../../src/growth/demand.ts';
import { freezeGrowth } from '../../src/growth/freeze.ts';
import { Grower } from '../../src/growth/grower.ts';
import { Attacher } from '../../src/moves/attach.ts';
import { type Budget, type RefineResult, refineForest } from '../../src/refine/refine.ts';
import { Room } from '../../src/room/room.ts';
import { specFromValue } from '../../src/spec/parse.ts';
import type { Spec } from '../../src/spec/types.ts';
import { buildTissue } from '../../src/tissue/build-tissue.ts';
import { createSites } from '../../src/tissue/sites.ts';
import { ForestBuilder } from '../../src/tree/builder.ts';
import { branchedCost, forestChecksum, peakMegabytes, quantile, timed, vesselVolume } from '../support/figures.ts';
import { measureJunctions } from '../support/junction-angles.ts';

const quick = process.argv.includes('quick');
const long = process.argv.includes('long');
const asked = (part: string) =>
  process.argv.includes(part) || !['gain', 'price', 'angles', 'long'].some((name) => process.argv.includes(name));

const RADII_MM = [15, 12, 10] as const;
/** m; what the first vessel needs at least before it may part, at a radius of 1 µm. */
const STUB = 4e-6;

/** s; where nothing is in the way the last sweeps go on for long and gain next to nothing. */
const HAIR_SECONDS = 90;

interface Case {
  readonly count: number;
  readonly inletRadius_um: number;
  readonly rule?: 'junction-exponent' | 'least-power';
  readonly seed?: string;
}

function ellipsoidSpec({ count, inletRadius_um, rule = 'junction-exponent', seed = 'bench' }: Case): Spec {
  const radius = inletRadius_um * 1e-6;
  // Least power: Q = (π/4) √(m/μ) r³, so that both rules give the first vessel the same radius.
  const flow = (Math.PI / 4) * Math.sqrt(625 / 0.0035) * radius * radius * radius;
  return specFromValue({
    name: 'bench ellipsoid',
    seed,
    tissue: { shape: 'ellipsoid', center_mm: [0, 0, 0], radii_mm: RADII_MM },
    trees: [{ inlet: { position_mm: [-15, 0, 0], direction: [1, 0, 0], flow_m3_s: flow }, terminals: { count } }],
    blood: { viscosity: { law: 'constant', value_mPa_s: 3.5 } },
    sizing:
      rule === 'least-power'
        ? { rule, maintenance_W_m3: 625 }
        : { rule, junction_exponent: 3, inlet_radius_um: inletRadius_um },
    clearance: { gap_um: 0 },
    junctions: { min_angle_deg: 15 },
    refine: 'none',
  });
}

/** Sites in the order that growth takes them: at least a terminal's radius and run-out from the boundary. */
function sitesFor(count: number, spec: Spec, depth: number): number[] {
  const tissue = buildTissue(spec.tissue, new Map());
  const sites = createSites(tissue, randomStream(spec.seed, 'sites'));
  const list: number[] = [];
  while (list.length < 3 * count && sites.next(depth)) list.push(sites.x, sites.y, sites.z);
  return list;
}

/** Grows terminals at given sites; those that find no room are left out. */
function growAt(spec: Spec, sites: readonly number[]): Grower {
  const tissue = buildTissue(spec.tissue, new Map());
  const demand = new Demand('points', sites.length / 3, null, sites, null, 0);
  const grower = new Grower(spec, tissue, [demand], null);
  grower.grow();
  grower.finish();
  return grower;
}

function refine(grower: Grower, spec: Spec, budget: Budget, most = Number.POSITIVE_INFINITY): RefineResult {
  const start = process.cpuUsage();
  const result = refineForest(grower.builder, grower.room, spec, {
    budget,
    enough: () => {
      const used = process.cpuUsage(start);
      return (used.user + used.system) / 1e6 >= most;
    },
  });
  grower.finish();
  return result;
}

/** Cost of the same sites hung one after the other, from the end of the stub on, and never touched again. */
function attachOnly(spec: Spec, sites: readonly number[]): number {
  const tissue = buildTissue(spec.tissue, new Map());
  const builder = new ForestBuilder(3);
  const [x, y, z] = spec.trees[0]!.inlet.position;
  builder.addRoot(x + STUB, y, z, 1e-6);
  const room = new Room(builder, tissue, { gap: 0, cosMinAngle: Math.cos(0.26), cosMinBend: 0 }, 2e-3);
  const attacher = new Attacher(
    builder,
    room,
    { first: 16, second: 64, keep: 8, slimmest: 1, slack: 1.01, headroom: 1.03 },
    (_row, _along, _length, share) => share,
  );
  const first = builder.addChild(0, sites[0]!, sites[1]!, sites[2]!);
  builder.load[first] = 1;
  builder.weight[first] = 1;
  room.begin();
  room.move(first);
  room.commit();
  let served = 1;
  for (let k = 3; k < sites.length; k += 3) {
    attacher.refreshPotential(builder.preorder(0), 1);
    if (k % 300 === 0) room.rebuild(0.9 * Math.cbrt(tissue.volume / served));
    if (attacher.attach(0, sites[k]!, sites[k + 1]!, sites[k + 2]!, 1) >= 0) served++;
  }
  const whole = builder.load[builder.child[0]!]!;
  let cost = STUB;
  for (let row = 0; row < builder.count; row++) {
    const above = builder.parent[row]!;
    if (above < 0) continue;
    const p = builder.position;
    const length = Math.hypot(...[0, 1, 2].map((k) => p[3 * row + k]! - p[3 * above + k]!));
    const root = Math.cbrt(builder.load[row]! / whole);
    cost += root * root * length;
  }
  console.log(`  ${served} of ${sites.length / 3} served by attachment alone`);
  return cost;
}

const mm = (metres: number): string => (1e3 * metres).toFixed(3);
const percent = (ratio: number): string => `${(100 * (1 - ratio)).toFixed(2)} %`;

function gain(): void {
  const count = quick ? 200 : 1000;
  const spec = ellipsoidSpec({ count, inletRadius_um: 1 });
  const sites = sitesFor(count, spec, 1e-5);
  console.log(`gain: ${count} terminals, no clearance (first vessel 1 µm)`);
  const bare = attachOnly(spec, sites);
  const grown = timed(() => growAt(spec, sites));
  const base = branchedCost(freezeGrowth(grown.result, spec));
  console.log(`  hung one by one, nothing moved afterwards: ${mm(bare)}`);
  console.log(
    `  grown (nodes are moved and coarse subtrees hung anew on the way): ${mm(base)}, ${percent(base / bare)} lower, ${grown.seconds.toFixed(2)} s, ${grown.result.served} served`,
  );
  const most = long ? 60 : 5;
  const annealed: Budget = { kind: 'annealed', random: randomStream('bench', 'annealing') };
  const budgets: readonly (readonly [string, Budget, number])[] = [
    ['quick', { kind: 'quick' }, Number.POSITIVE_INFINITY],
    [`thorough, at most ${most} s`, { kind: 'thorough' }, most],
    [`annealed, at most ${most} s`, annealed, most],
    ...(long ? ([['steps of thorough for 60 s', { kind: 'steps', steps: 100_000 }, 60]] as const) : []),
  ];
  for (const [name, budget, seconds] of budgets) {
    const grower = growAt(spec, sites);
    const refined = timed(() => refine(grower, spec, budget, seconds));
    const forest = freezeGrowth(grower, spec);
    const cost = branchedCost(forest);
    console.log(
      `  ${name}: ${mm(cost)}, ${percent(cost / base)} below growth, ${percent(cost / bare)} below hanging alone; ${refined.seconds.toFixed(2)} s, ${refined.result.steps} steps, ${refined.result.stopped}, checksum ${forestChecksum(forest)}`,
    );
  }
}

function price(): void {
  const count = quick ? 400 : 10_000;
  // Found by trying: 5.0 % of the ellipsoid is vessel after thorough refinement.
  const inletRadius_um = quick ? 1430 : 1250;
  const wide = ellipsoidSpec({ count, inletRadius_um });
  const tissue = buildTissue(wide.tissue, new Map());
  const spare = sitesFor(Math.ceil(1.1 * count), wide, (2.5 * inletRadius_um * 1e-6) / Math.cbrt(count));
  const demand = new Demand('count', count, listed(spare), null, null, 0);
  const grower = new Grower(wide, tissue, [demand], null);
  const grown = timed(() => {
    grower.grow();
    grower.finish();
  });
  const before = branchedCost(freezeGrowth(grower, wide));
  const refined = timed(() => refine(grower, wide, { kind: 'thorough' }));
  const forest = freezeGrowth(grower, wide);
  const cost = branchedCost(forest);
  const served: number[] = [];
  for (let i = 1; i < forest.count; i++) {
    if (!forest.parent.includes(i)) served.push(...forest.position.slice(3 * i, 3 * i + 3));
  }
  console.log(
    `price: ${grower.served} of ${count} terminals, first vessel ${inletRadius_um} µm, vessel volume ${((100 * vesselVolume(forest)) / tissue.volume).toFixed(2)} %, checksum ${forestChecksum(forest)}`,
  );
  console.log(
    `  grown ${mm(before)} (${grown.seconds.toFixed(1)} s), thorough ${mm(cost)} (${refined.seconds.toFixed(1)} s, ${refined.result.steps} steps)`,
  );
  const thin = ellipsoidSpec({ count: served.length / 3, inletRadius_um: 1 });
  const hair = growAt(thin, inOrder(served, spare));
  const hairGrown = branchedCost(freezeGrowth(hair, thin));
  const hairRefined = timed(() => refine(hair, thin, { kind: 'thorough' }, HAIR_SECONDS));
  const least = branchedCost(freezeGrowth(hair, thin));
  console.log(
    `  the same ${hair.served} sites hair-thin: grown ${mm(hairGrown)}, thorough ${mm(least)} (${hairRefined.seconds.toFixed(1)} s, ${hairRefined.result.steps} steps, ${hairRefined.result.stopped})`,
  );
  console.log(
    `  price of clearance: grown ${(100 * (before / hairGrown - 1)).toFixed(2)} %, refined ${(100 * (cost / least - 1)).toFixed(2)} %; grown over refined hair-thin ${(100 * (before / least - 1)).toFixed(2)} %`,
  );
}

/** A list as a stream of sites. */
function listed(at: readonly number[]) {
  let k = -3;
  return {
    next: () => {
      k += 3;
      return k < at.length;
    },
    save: () => {},
    restore: () => {},
    get x() {
      return at[k]!;
    },
    get y() {
      return at[k + 1]!;
    },
    get z() {
      return at[k + 2]!;
    },
  };
}

/** The sites that were served, in the order in which they were offered. */
function inOrder(served: readonly number[], offered: readonly number[]): number[] {
  const has = new Set<string>();
  for (let k = 0; k < served.length; k += 3) has.add(served.slice(k, k + 3).join());
  const list: number[] = [];
  for (let k = 0; k < offered.length; k += 3)
    if (has.has(offered.slice(k, k + 3).join())) list.push(...offered.slice(k, k + 3));
  return list;
}

function angles(): void {
  const count = quick ? 300 : 2000;
  for (const [name, inletRadius_um] of [
    ['hair-thin', 1],
    ['about 2 % vessel volume', quick ? 900 : 820],
  ] as const) {
    const spec = ellipsoidSpec({ count, inletRadius_um, rule: 'least-power' });
    const grower = growAt(spec, sitesFor(count, spec, (2.5e-6 * inletRadius_um) / Math.cbrt(count)));
    refine(grower, spec, { kind: 'thorough' });
    const forest = freezeGrowth(grower, spec);
    const volume = vesselVolume(forest) / buildTissue(spec.tissue, new Map()).volume;
    grower.room.settle();
    const junctions = measureJunctions(grower.room);
    const tell = (list: typeof junctions) => {
      if (list.length === 0) return 'none';
      const all = list.flatMap(({ deviation }) => deviation);
      return `${list.length}, median ${quantile(all, 0.5).toFixed(3)}°, 90 % below ${quantile(all, 0.9).toFixed(2)}°, greatest ${Math.max(...all).toFixed(1)}°`;
    };
    console.log(
      `angles: ${grower.served} terminals, ${name} (${(100 * volume).toPrecision(3)} %), least power, thorough; deviation from the best angle, children apart`,
    );
    console.log(`  junctions that nothing binds: ${tell(junctions.filter(({ free }) => free))}`);
    console.log(`  all junctions: ${tell(junctions)}; checksum ${forestChecksum(forest)}`);
    const bound = junctions.filter(({ free }) => free).flatMap(({ deviation }) => deviation);
    if (!(quantile(bound, 0.5) <= 2)) process.exitCode = 1;
  }
}

if (asked('gain') || long) gain();
if (asked('price')) price();
if (asked('angles')) angles();
console.log(`peak ${peakMegabytes()}`);
