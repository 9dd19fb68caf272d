import { type Random, randomStream } from '../core/random.ts';
import type { StateIn } from '../core/state.ts';
import { rootOf } from '../physics/junction.ts';
import { fixedInletRadius, junctionExponent } from '../sizing/size-tree.ts';
import type { Spec, TreeSpec } from '../spec/types.ts';
import { createSites } from '../tissue/sites.ts';
import { spacedSites } from '../tissue/spaced-sites.ts';
import type { Tissue } from '../tissue/tissue.ts';
import { Demand, type SiteStream } from './demand.ts';
import { ForeseenSites, sharesOf } from './foreseen-sites.ts';
import { farthestFirst } from './point-order.ts';

/**
 * What one tree has to serve.
 *
 * @param most for a rehearsal: at most so many terminals
 */
export function demandOf(
  spec: Spec,
  tree: TreeSpec,
  index: number,
  tissue: Tissue,
  guess: readonly number[] | null,
  salt: number,
  first: readonly number[],
  most: number,
): Demand {
  const { terminals } = tree;
  const byTerritory = terminals.byTerritory === true;
  const exponent = junctionExponent(spec);
  const radiusOf = (count: number) => {
    const fixed = fixedInletRadius(spec, tree, count);
    return (Number.isNaN(fixed) ? guess![index]! : fixed) / rootOf(count, exponent);
  };
  if (terminals.by === 'count') {
    const wanted = Math.min(terminals.count, most);
    const sites = streamOf(spec, index, tissue, wanted, byTerritory, salt);
    return new Demand('count', wanted, sites, null, null, 1.05 * radiusOf(terminals.count), byTerritory);
  }
  if (terminals.by === 'spacing') {
    const count = Math.max(1, tissue.perfusion.whole / (terminals.spacing * terminals.spacing * terminals.spacing));
    const random = siteRandom(spec, index, salt);
    const sites = spacedSites(tissue, random, terminals.spacing, 1.05 * radiusOf(count));
    const share = byTerritory ? sharesOf(tissue, sites) : null;
    return new Demand('spacing', Math.min(sites.length / 3, most), null, sites, share, 0, byTerritory);
  }
  const order = farthestFirst(tree, salt === 0 ? null : randomStream(spec.seed, `points ${index} ${salt}`), first);
  const list = new Float64Array(3 * order.length);
  order.forEach((k, i) => {
    list.set(terminals.points[k]!, 3 * i);
  });
  const share = byTerritory ? sharesOf(tissue, list) : order.map((k) => terminals.share[k]!);
  return new Demand('points', Math.min(order.length, most), null, list, share, 0, byTerritory);
}

/** What one tree still had to serve when it was saved. */
export function restoredDemand(spec: Spec, tree: TreeSpec, index: number, tissue: Tissue, from: StateIn): Demand {
  const { by, byTerritory = false } = tree.terminals;
  const [wanted, minDepth] = from.reals('asked') as unknown as [number, number];
  const stream = by === 'count' ? streamOf(spec, index, tissue, wanted, byTerritory) : null;
  const demand = new Demand(by, wanted, stream, null, null, minDepth, byTerritory);
  demand.restore(from);
  return demand;
}

function streamOf(
  spec: Spec,
  index: number,
  tissue: Tissue,
  wanted: number,
  byTerritory: boolean,
  salt = 0,
): SiteStream {
  const even = createSites(tissue, siteRandom(spec, index, salt));
  return byTerritory ? new ForeseenSites(tissue, even, wanted) : even;
}

function siteRandom(spec: Spec, index: number, salt: number): Random {
  return randomStream(spec.seed, salt === 0 ? `sites ${index}` : `sites ${index} ${salt}`);
}
