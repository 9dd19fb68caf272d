/*
 * Growth at several sizes at about 5 % vessel volume, and against the plain twin, in one run. Prints sizes, a checksum of
 * the tree, the median time of the processor and the peak memory.
 *   node tests/bench/run.mjs growth [-- quick | scale | twin | million | 20000 …]
 *     scale    10⁴ and 10⁵ terminals: time a terminal, and the ratio of both; with `million` 10⁶ too
 *     twin     the plain twin's time for one more terminal at 4,000, and its cost and ours on the same sites as far as it
 *              gets in about a minute
 *     quick    both, small
 *     a number so many terminals, once
 */
import { randomStream } from '../../src/core/random.ts';
import { Demand } from '../../src/growth/demand.ts';
import { freezeGrowth } from '../../src/growth/freeze.ts';
import { growForest } from '../../src/growth/grow.ts';
import { Grower } from '../../src/growth/grower.ts';
import { specFromValue } from '../../src/spec/parse.ts';
import type { Spec } from '../../src/spec/types.ts';
import { buildTissue } from '../../src/tissue/build-tissue.ts';
import { createSites } from '../../src/tissue/sites.ts';
import type { Forest } from '../../src/tree/forest.ts';
import { branchedCost, forestChecksum, median, peakMegabytes, timed, vesselVolume } from '../support/figures.ts';
import { type PlainNode, plainAttach, plainCost, plainRoot } from '../support/plain-growth.ts';

const words = process.argv.slice(2);
const quick = words.includes('quick');
const one = Number(words.find((word) => /^\d/.test(word)) ?? Number.NaN);
const all = quick || !words.some((word) => ['scale', 'twin', 'million'].includes(word) || word === String(one));

/** µm; first vessels for about 5 % of the ellipsoid, found by trying. */
const INLET_RADIUS: Readonly<Record<number, number>> = {
  1000: 1430,
  4000: 1310,
  10000: 1230,
  100000: 1130,
  1000000: 1050,
};

function ellipsoidSpec(count: number, inletRadius_um: number): Spec {
  return specFromValue({
    name: 'bench ellipsoid',
    seed: 'bench',
    tissue: { shape: 'ellipsoid', center_mm: [0, 0, 0], radii_mm: [15, 12, 10] },
    trees: [{ inlet: { position_mm: [-15, 0, 0], direction: [1, 0, 0], flow_mL_min: 10 }, terminals: { count } }],
    sizing: { rule: 'junction-exponent', junction_exponent: 3, inlet_radius_um: inletRadius_um },
    clearance: { gap_um: 0 },
    junctions: { min_angle_deg: 15 },
    refine: 'none',
  });
}

/** µs of the processor a terminal. */
function growAt(count: number, rounds: number): number {
  const spec = ellipsoidSpec(count, INLET_RADIUS[count] ?? 1200);
  const tissue = buildTissue(spec.tissue, new Map());
  const times: number[] = [];
  let told = '';
  for (let round = 0; round < rounds; round++) {
    const { seconds, result } = timed(() => growForest(spec, tissue));
    times.push(seconds);
    const forest = freezeGrowth(result.grower, spec);
    const share = (100 * vesselVolume(forest)) / tissue.volume;
    told = `${result.grower.served} served, vessel volume ${share.toFixed(2)} %, cost ${(1e3 * branchedCost(forest)).toFixed(2)} mm, checksum ${forestChecksum(forest)}`;
  }
  const each = (1e6 * median(times)) / count;
  console.log(
    `${count} terminals: median ${median(times).toFixed(2)} s of processor time, ${each.toFixed(0)} µs a terminal, peak ${peakMegabytes()}; ${told}`,
  );
  return each;
}

function scale(): void {
  const sizes = quick ? [1000, 4000] : words.includes('million') ? [10_000, 100_000, 1_000_000] : [10_000, 100_000];
  const each = sizes.map((count, k) => growAt(count, quick || k > 0 ? 1 : 3));
  for (let k = 1; k < sizes.length; k++) {
    const ratio = each[k]! / each[0]!;
    console.log(`time a terminal, ${sizes[k]} over ${sizes[0]}: ${ratio.toFixed(2)}, at most 1.5 wanted`);
    if (!quick && !(ratio <= 1.5)) process.exitCode = 1;
  }
}

/** The same sites for both, and vessels so thin that nobody is in another's way: the twin knows no clearance. */
function growThin(sites: readonly number[]): Forest {
  const spec = ellipsoidSpec(sites.length / 3, 1);
  const demand = new Demand('points', sites.length / 3, null, sites, null, 0);
  const grower = new Grower(spec, buildTissue(spec.tissue, new Map()), [demand], null);
  grower.grow();
  grower.finish();
  return freezeGrowth(grower, spec);
}

/** A forest as the twin sees it. */
function asPlain(forest: Forest): PlainNode {
  const nodes = Array.from({ length: forest.count }, (_, i) =>
    plainRoot([forest.position[3 * i]!, forest.position[3 * i + 1]!, forest.position[3 * i + 2]!]),
  );
  for (let i = 1; i < forest.count; i++) {
    nodes[i]!.parent = nodes[forest.parent[i]!]!;
    nodes[forest.parent[i]!]!.children.push(nodes[i]!);
  }
  for (const node of nodes) if (node.children.length === 0) node.share = 1;
  return nodes[0]!;
}

function twin(): void {
  const most = quick ? 400 : 4000;
  const reach = quick ? 100 : 800;
  const tissue = buildTissue(ellipsoidSpec(1, 1).tissue, new Map());
  const stream = createSites(tissue, randomStream('bench', 'twin'));
  const sites: number[] = [];
  while (sites.length < 3 * most + 3 && stream.next(1e-5)) sites.push(stream.x, stream.y, stream.z);

  const grown = timed(() => growThin(sites.slice(0, 3 * most)));
  const each = (1e6 * grown.seconds) / most;
  // The twin's time for one more, on a tree it has not had to grow itself: that would take hours.
  const [x, y, z] = sites.slice(3 * most) as [number, number, number];
  const more = timed(() => plainAttach(asPlain(grown.result), [x, y, z], 1));
  // One more costs it O(n²), so n of them a third of n times the last.
  const whole = more.seconds / 3 / (grown.seconds / most);
  console.log(
    `plain twin at ${most} terminals: ${more.seconds.toFixed(2)} s for one more, about ${((more.seconds * most) / 3).toFixed(0)} s for all; growth ${grown.seconds.toFixed(2)} s for all, ${each.toFixed(0)} µs each, checksum ${forestChecksum(grown.result)}`,
  );
  console.log(
    `  ratio twin / growth: ${((1e6 * more.seconds) / each).toFixed(0)} for one more, about ${whole.toFixed(0)} for all; at least 300 wanted at 4,000`,
  );
  if (!(whole >= (quick ? 3 : 300))) process.exitCode = 1;

  // From the twin's root straight to the first site; growth's stub of some µm makes no difference to be seen.
  const root = plainRoot([-0.015, 0, 0]);
  const slow = timed(() => {
    for (let k = 0; k < reach; k++) plainAttach(root, sites.slice(3 * k, 3 * k + 3) as [number, number, number], 1);
  });
  const theirs = plainCost(root) / Math.cbrt(reach * reach);
  const ours = branchedCost(growThin(sites.slice(0, 3 * reach)));
  console.log(
    `  the same ${reach} sites: twin ${(1e3 * theirs).toFixed(3)} mm in ${slow.seconds.toFixed(1)} s, growth ${(1e3 * ours).toFixed(3)} mm; growth over twin ${(ours / theirs).toFixed(4)}, at most 1 wanted`,
  );
  if (!(ours / theirs <= (quick ? 1.02 : 1))) process.exitCode = 1;
}

if (!Number.isNaN(one)) growAt(one, 1);
if (all || words.includes('scale') || words.includes('million')) scale();
if (all || words.includes('twin')) twin();
