import type { Watch } from '../core/progress.ts';
import type { StateIn, StateOut } from '../core/state.ts';
import type { Crew } from '../moves/crew.ts';
import type { ForestBuilder } from '../tree/builder.ts';

/**
 * Told at each moment at which the work could be saved, with what saves it; that must be used before this comes back.
 * Whether it is used never changes the result.
 */
export type OnMoment = (save: (out: StateOut) => void) => void;

export interface GrowthOptions extends Watch {
  readonly onMoment?: OnMoment | undefined;
  /** What was saved of the same work, to go on from. */
  readonly resume?: StateIn | undefined;
  /** Told the forest as it stands, now and then while it grows. */
  readonly onForest?: ((builder: ForestBuilder) => void) | undefined;
  /** Threads that look for places together; none: the calling thread alone. The result is the same. */
  readonly crew?: Crew | undefined;
}
