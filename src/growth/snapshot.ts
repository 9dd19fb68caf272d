import type { StateIn, StateOut } from '../core/state.ts';
import type { Spec } from '../spec/types.ts';
import type { Tissue } from '../tissue/tissue.ts';
import { restoredDemand } from './demand-of.ts';
import { Grower, type Stopped } from './grower.ts';
import type { GrowthOptions } from './options.ts';

/*
 * What of a growth is saved, so that going on from it gives the same bytes as never having stopped.
 *
 * It is saved at moments at which the room's grid follows from the forest alone: after each sweep that moves nodes, and
 * before radii become final. The refiner has moments of its own (refine/schedule.ts). Whoever holds the clock decides
 * whether a moment is used; what was saved before has no part in what comes after, and a test looks that every field of
 * what is saved is either in the state or follows from it (tests/unit/growth/snapshot.slow.test.ts).
 */

const STOPPED: readonly Stopped[] = ['complete', 'no-room', 'cancelled'];

/** What a growth was begun with. */
export interface Begun {
  /** (trees) m; first vessels' radii foreseen; null where none depends on its tree. */
  readonly guess: readonly number[] | null;
  /** Times that the forest was planted anew before. */
  readonly attempt: number;
}

export interface RestoredGrowth extends Begun {
  readonly grower: Grower;
  /** How growth ended; null where it has not. */
  readonly stopped: Stopped | null;
}

/** The options of a grower whose moments are told with what it was begun with. */
export function withMoments(options: GrowthOptions, begun: Begun): GrowthOptions {
  const { onMoment } = options;
  if (onMoment === undefined) return options;
  return {
    ...options,
    onMoment: (save) =>
      onMoment((out) => {
        saveBegun(out, begun, null);
        save(out.within('grower'));
      }),
  };
}

/** Saves a growth that is over, for moments of what comes after it; the room's grid must be fresh. */
export function saveGrown(out: StateOut, grower: Grower, begun: Begun, stopped: Stopped): void {
  saveBegun(out, begun, stopped);
  grower.save(out.within('grower'));
}

function saveBegun(out: StateOut, { guess, attempt }: Begun, stopped: Stopped | null): void {
  out.list('begun', 'i32', [attempt, guess === null ? 0 : 1, stopped === null ? -1 : STOPPED.indexOf(stopped)]);
  out.list('guess', 'f64', guess ?? []);
}

/** The growth that was saved. */
export function restoreGrowth(spec: Spec, tissue: Tissue, options: GrowthOptions, from: StateIn): RestoredGrowth {
  const [attempt, guessed, stopped] = from.wholes('begun') as unknown as [number, number, number];
  const begun: Begun = { guess: guessed === 1 ? Array.from(from.reals('guess')) : null, attempt };
  const part = from.within('grower');
  const demands = spec.trees.map((tree, t) =>
    restoredDemand(spec, tree, t, tissue, part.within('forest').within(`trees[${t}]`).within('demand')),
  );
  const grower = new Grower(spec, tissue, demands, begun.guess, withMoments(options, begun));
  grower.restore(part);
  return { ...begun, grower, stopped: stopped < 0 ? null : STOPPED[stopped]! };
}
