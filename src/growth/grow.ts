import { fixedInletRadius } from '../sizing/size-tree.ts';
import type { Spec, TreeSpec } from '../spec/types.ts';
import type { Tissue } from '../tissue/tissue.ts';
import type { Demand } from './demand.ts';
import { demandOf } from './demand-of.ts';
import { firstGuess } from './first-guess.ts';
import { Grower, type Stopped } from './grower.ts';
import { SPARE } from './growing-tree.ts';
import type { GrowthOptions } from './options.ts';
import { type Begun, restoreGrowth, withMoments } from './snapshot.ts';

/** Terminals of the small tree that is grown first where radii depend on the tree's lengths; a twentieth if that is more. */
const REHEARSAL = 200;
/** Times a tree is grown anew because its first vessel came out wider than planted. */
const RESTARTS = 6;

export interface Growth extends Begun {
  readonly grower: Grower;
  readonly stopped: Stopped;
  /** True where it was saved after its end: what was under way is not growth. */
  readonly restored: boolean;
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
  let saved = options.resume === undefined ? null : restoreGrowth(spec, tissue, options, options.resume);
  let guess = saved === null ? null : saved.guess;
  if (saved === null && unknown.includes(true)) guess = rehearse(spec, tissue, unknown, salt);
  for (let attempt = saved?.attempt ?? 0; ; attempt++) {
    const grower: Grower = saved?.grower ?? plantForest(spec, tissue, options, { guess, attempt }, salt, first);
    const grown = { grower, guess, attempt, restored: false };
    if (saved !== null && saved.stopped !== null) return { ...grown, stopped: saved.stopped, restored: true };
    saved = null;
    let stopped = grower.grow();
    if (stopped !== 'cancelled') stopped = grower.finish();
    if (stopped === 'cancelled' || guess === null || attempt >= RESTARTS) return { ...grown, stopped };
    if (!grower.forest.cramped && attempt >= 1) return { ...grown, stopped };
    if (!grower.forest.cramped && (stopped === 'complete' || grower.misfits().length === 0))
      return { ...grown, stopped };
    const needed = grower.forest.foresee(grower.trees.map(({ demand }) => demand.wanted));
    guess = guess.map((radius, t) => (unknown[t]! ? Math.max(SPARE * needed[t]!, 1.05 * radius) : radius));
  }
}

function plantForest(
  spec: Spec,
  tissue: Tissue,
  options: GrowthOptions,
  begun: Begun,
  salt: number,
  first: readonly (readonly number[])[],
): Grower {
  const { guess } = begun;
  const demands = spec.trees.map((tree, t) => demandOf(spec, tree, t, tissue, guess, salt, first[t] ?? [], Infinity));
  return new Grower(spec, tissue, demands, guess, withMoments(options, begun));
}

/** Grows small trees to foresee the first vessels' radii. */
function rehearse(spec: Spec, tissue: Tissue, unknown: readonly boolean[], salt: number): number[] {
  let guess = spec.trees.map((_, t) => (unknown[t] ? firstGuess(spec, t, tissue) : Number.NaN));
  for (let attempt = 0; ; attempt++) {
    const demands = spec.trees.map((tree, t) => {
      const most = tree.terminals.by === 'count' ? Math.max(REHEARSAL, tree.terminals.count / 20) : REHEARSAL;
      return demandOf(spec, tree, t, tissue, guess, salt, [], Math.round(most));
    });
    const grower = new Grower(spec, tissue, demands, guess);
    grower.grow();
    const radii = grower.forest.foresee(spec.trees.map((tree, t) => wantedBy(tree, demands[t]!)));
    if (!grower.forest.cramped || attempt >= RESTARTS) {
      return radii.map((radius, t) => (unknown[t] ? SPARE * radius : Number.NaN));
    }
    guess = guess.map((radius, t) => Math.max(1.4 * radius, SPARE * radii[t]!));
  }
}

function wantedBy(tree: TreeSpec, demand: Demand): number {
  return tree.terminals.by === 'count' ? tree.terminals.count : Math.max(demand.siteCount, demand.wanted);
}
