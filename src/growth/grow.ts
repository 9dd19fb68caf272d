import { fixedInletRadius } from '../sizing/size-tree.ts';
import type { Spec, TreeSpec } from '../spec/types.ts';
import type { Tissue } from '../tissue/tissue.ts';
import type { GrowthOptions } from './crew.ts';
import type { Demand } from './demand.ts';
import { demandOf } from './demand-of.ts';
import { firstGuess, Grower, SPARE, type Stopped } from './grower.ts';

/** Terminals of the small tree that is grown first where radii depend on the tree's lengths; a twentieth if that is more. */
const REHEARSAL = 200;
/** Times a tree is grown anew because its first vessel came out wider than planted. */
const RESTARTS = 6;

export interface Growth {
  readonly grower: Grower;
  readonly stopped: Stopped;
}

/**
 * Grows the spec's trees in a tissue, all promises held at every step, and finishes them with final radii.
 *
 * @param salt  0 for the spec's own tree; other numbers give other trees of the same spec (order of explicit points)
 * @param first sites of each tree to be tried before others, by index (explicit points that an earlier try left out)
 * @throws InputError where an inlet or the tissue leaves no room for even one terminal
 */
export function growForest(
  spec: Spec,
  tissue: Tissue,
  options: GrowthOptions = {},
  salt = 0,
  first: readonly (readonly number[])[] = [],
): Growth {
  const unknown = spec.trees.map((tree) => Number.isNaN(fixedInletRadius(spec, tree, 1)));
  let guess: number[] | null = null;
  if (unknown.includes(true)) guess = rehearse(spec, tissue, unknown, salt);
  for (let attempt = 0; ; attempt++) {
    const demands = spec.trees.map((tree, t) => demandOf(spec, tree, t, tissue, guess, salt, first[t] ?? [], Infinity));
    const grower = new Grower(spec, tissue, demands, guess, options);
    let stopped = grower.grow();
    if (stopped !== 'cancelled') stopped = grower.finish();
    if (stopped === 'cancelled' || guess === null || attempt >= RESTARTS) return { grower, stopped };
    if (!grower.cramped && attempt >= 1) return { grower, stopped };
    if (!grower.cramped && (stopped === 'complete' || grower.misfits().length === 0)) return { grower, stopped };
    const needed = grower.foresee(demands.map((demand) => demand.wanted));
    guess = guess.map((radius, t) => (unknown[t]! ? Math.max(SPARE * needed[t]!, 1.05 * radius) : radius));
  }
}

/** Grows small trees to foresee the first vessels' radii. */
function rehearse(spec: Spec, tissue: Tissue, unknown: readonly boolean[], salt: number): number[] {
  let guess = spec.trees.map((_, t) => (unknown[t] ? 1.6 * firstGuess(spec, t, tissue) : Number.NaN));
  for (let attempt = 0; ; attempt++) {
    const demands = spec.trees.map((tree, t) => {
      const most = tree.terminals.by === 'count' ? Math.max(REHEARSAL, tree.terminals.count / 20) : REHEARSAL;
      return demandOf(spec, tree, t, tissue, guess, salt, [], Math.round(most));
    });
    const grower = new Grower(spec, tissue, demands, guess);
    grower.grow();
    const radii = grower.foresee(spec.trees.map((tree, t) => wantedBy(tree, demands[t]!)));
    if (!grower.cramped || attempt >= RESTARTS) {
      return radii.map((radius, t) => (unknown[t] ? SPARE * radius : Number.NaN));
    }
    guess = guess.map((radius, t) => Math.max(1.4 * radius, SPARE * radii[t]!));
  }
}

function wantedBy(tree: TreeSpec, demand: Demand): number {
  return tree.terminals.by === 'count' ? tree.terminals.count : Math.max(demand.siteCount, demand.wanted);
}
