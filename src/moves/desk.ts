import { Room } from '../room/room.ts';
import type { Tissue } from '../tissue/tissue.ts';
import { ForestBuilder } from '../tree/builder.ts';
import type { ProposalTask } from './crew.ts';
import { lookAll } from './look-all.ts';
import { NodeLook } from './node-look.ts';
import { Potential } from './potential.ts';
import { proposeAll } from './propose-all.ts';
import { type ProposeOptions, Proposer } from './proposer.ts';

/** A member's own reader of a forest that another thread grows. */
export class Desk {
  private readonly tissue: Tissue;
  private reader: Reader | null = null;
  private work: ProposalTask['work'] | null = null;
  private options: ProposeOptions | null = null;

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
      this.reader = { builder, room, potential, proposer: null, look: null, slack: 0 };
    }
    this.reader.builder.adopt(task.builder);
    this.reader.room.adopt(task.room);
    if (task.potential !== null) this.reader.potential.values = task.potential;
    this.options = task.options;
    this.work = task.work;
  }

  /** Works on the sites or nodes from … end − 1 of the task. */
  propose(from: number, end: number): void {
    const reader = this.reader!;
    const { builder, room } = reader;
    const work = this.work!;
    if ('sites' in work) {
      reader.proposer ??= new Proposer(builder, room, reader.potential, this.options!);
      proposeAll(reader.proposer, work.sites, from, end);
      return;
    }
    if (reader.look === null || reader.slack !== work.moves.slack) {
      reader.slack = work.moves.slack;
      reader.look = new NodeLook(builder, room, reader.slack);
    }
    lookAll(reader.look, builder, work.moves, from, end);
  }
}

interface Reader {
  readonly builder: ForestBuilder;
  readonly room: Room;
  readonly potential: Potential;
  proposer: Proposer | null;
  look: NodeLook | null;
  slack: number;
}
