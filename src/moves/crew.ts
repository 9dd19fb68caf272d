import type { Memory } from '../core/memory.ts';
import type { Room, RoomLimits, RoomView } from '../room/room.ts';
import type { BuilderView, ForestBuilder } from '../tree/builder.ts';
import type { MoveColumns } from './look-all.ts';
import type { Potential } from './potential.ts';
import type { SiteColumns } from './propose-all.ts';
import type { ProposeOptions } from './proposer.ts';

/** Sites or nodes looked at in one go by one member of a crew. */
export const CHUNK = 32;

/** All that a member of a crew must see to propose; plain columns and numbers, fit to be sent to another thread. */
export interface ProposalTask {
  readonly options: ProposeOptions | null;
  readonly limits: RoomLimits;
  readonly builder: BuilderView;
  readonly room: RoomView;
  readonly potential: Float64Array | null;
  /** Sites to propose places for, or nodes to look for better places for. */
  readonly work: { readonly sites: SiteColumns } | { readonly moves: MoveColumns };
}

/**
 * Several threads that look for places together. What they propose is the same however many they are, because each site
 * is looked at alone and nothing changes meanwhile.
 */
export interface Crew {
  /** Memory that all of them see. */
  readonly memory: Memory;
  /**
   * Has every chunk of a task worked on, and comes back when all are done.
   *
   * @param count sites or nodes of the task
   * @param mine  works on those from … end − 1, in the calling thread
   */
  work(task: ProposalTask, count: number, mine: (from: number, end: number) => void): void;
}

/** Sites or nodes from which on a crew is worth calling. */
const WORTH_CALLING = 128;

/**
 * Has sites or nodes looked at by a crew, or by the calling thread alone where there is none or little to do.
 *
 * @param mine      works on those from … end − 1, in the calling thread
 * @param potential, options what proposals need; looks at nodes need neither
 */
export function workTogether(
  crew: Crew | null,
  builder: ForestBuilder,
  room: Room,
  work: ProposalTask['work'],
  count: number,
  mine: (from: number, end: number) => void,
  potential: Potential | null = null,
  options: ProposeOptions | null = null,
): void {
  // A transaction that failed leaves reserves behind that members of a crew do not see, so that nobody may.
  room.begin();
  if (crew === null || count < WORTH_CALLING) {
    mine(0, count);
    return;
  }
  const values = potential?.values ?? null;
  const task = { options, limits: room.limits, builder: builder.view(), room: room.view(), potential: values, work };
  crew.work(task, count, mine);
}
