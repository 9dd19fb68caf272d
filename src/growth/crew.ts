import type { Memory } from '../core/memory.ts';
import type { Watch } from '../core/progress.ts';
import type { StateIn, StateOut } from '../core/state.ts';
import { NodeLook } from '../moves/node-look.ts';
import { Potential } from '../moves/potential.ts';
import { type ProposeOptions, Proposer } from '../moves/proposer.ts';
import { Room, type RoomLimits, type RoomView } from '../room/room.ts';
import type { Tissue } from '../tissue/tissue.ts';
import { type BuilderView, ForestBuilder } from '../tree/builder.ts';
import type { Batch } from './batch.ts';
import { LOOK_SLACK, lookAll, type MoveColumns } from './relaxer.ts';

/** Sites or nodes looked at in one go by one member of a crew. */
export const CHUNK = 32;

/** Columns of a batch that proposals are read from and written to. */
export type BatchColumns = Pick<
  Batch,
  'count' | 'keep' | 'order' | 'tree' | 'share' | 'position' | 'proposed' | 'row' | 'at'
>;

/** All that a member of a crew must see to propose; plain columns and numbers, fit to be sent to another thread. */
export interface ProposalTask {
  readonly options: ProposeOptions;
  readonly limits: RoomLimits;
  readonly builder: BuilderView;
  readonly room: RoomView;
  readonly potential: Float64Array;
  /** Sites to propose places for, or nodes to look for better places for. */
  readonly work: { readonly sites: BatchColumns } | { readonly moves: MoveColumns };
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

/**
 * Told at each moment at which the work could be saved, with what saves it; that must be used before this comes back.
 * Whether it is used never changes the result.
 */
export type OnMoment = (save: (out: StateOut) => void) => void;

export interface GrowthOptions extends Watch {
  readonly onMoment?: OnMoment | undefined;
  /** What was saved of the same work, to go on from. */
  readonly resume?: StateIn | undefined;
  /** Threads that look for places together; none: the calling thread alone. The result is the same. */
  readonly crew?: Crew | undefined;
}

/** A member's own reader of a forest that another thread grows. */
export class Desk {
  private readonly tissue: Tissue;
  private reader: Reader | null = null;
  private work: ProposalTask['work'] | null = null;

  /** @param tissue the same as the grower's, built anew in this thread */
  constructor(tissue: Tissue) {
    this.tissue = tissue;
  }

  /** Takes a task in hand. */
  open(task: ProposalTask): void {
    if (this.reader === null) {
      const builder = new ForestBuilder(task.builder.exponent, 1);
      const room = new Room(builder, this.tissue, task.limits, Number.MAX_VALUE);
      const potential = new Potential(builder);
      const proposer = new Proposer(builder, room, potential, task.options);
      this.reader = { builder, room, potential, proposer, look: new NodeLook(builder, room, LOOK_SLACK) };
    }
    this.reader.builder.adopt(task.builder);
    this.reader.room.adopt(task.room);
    this.reader.potential.values = task.potential;
    this.work = task.work;
  }

  /** Works on the sites or nodes from … end − 1 of the task. */
  propose(from: number, end: number): void {
    const { proposer, look, builder } = this.reader!;
    const work = this.work!;
    if ('sites' in work) proposeAll(proposer, work.sites, from, end);
    else lookAll(look, builder, work.moves, from, end);
  }
}

interface Reader {
  readonly builder: ForestBuilder;
  readonly room: Room;
  readonly potential: Potential;
  readonly proposer: Proposer;
  readonly look: NodeLook;
}

/** Looks for places for the sites from … end − 1 of a batch's order and writes what is found beside them. */
export function proposeAll(proposer: Proposer, batch: BatchColumns, from: number, end: number): void {
  const { keep, position } = batch;
  for (let n = from; n < end; n++) {
    const k = batch.order[n]!;
    const x = position[3 * k]!;
    const y = position[3 * k + 1]!;
    const z = position[3 * k + 2]!;
    const count = proposer.propose(batch.tree[k]!, x, y, z, batch.share[k]!);
    batch.proposed[k] = count;
    for (let i = 0; i < count; i++) batch.row[k * keep + i] = proposer.row[i]!;
    for (let i = 0; i < 3 * count; i++) batch.at[3 * k * keep + i] = proposer.at[i]!;
  }
}
