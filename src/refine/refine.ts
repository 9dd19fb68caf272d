import { type Memory, ownMemory } from '../core/memory.ts';
import type { Watch } from '../core/progress.ts';
import type { Random } from '../core/random.ts';
import type { StateIn, StateOut } from '../core/state.ts';
import type { Crew } from '../moves/crew.ts';
import { Exchanger } from '../moves/exchange.ts';
import { Potential } from '../moves/potential.ts';
import { Rehanger } from '../moves/rehang.ts';
import { Sweeper } from '../moves/sweeper.ts';
import type { Room } from '../room/room.ts';
import type { Spec } from '../spec/types.ts';
import type { ForestBuilder } from '../tree/builder.ts';
import { costOf, powerOfLoad, pumpingPrices, tubeWeights, wholeLoads } from './cost.ts';
import { Course } from './course.ts';

/** Rows whose subtrees are looked at in one step, so that a budget in seconds is kept on large trees. */
const ROWS_A_STEP = 20_000;
/** Gain of a change of topology over what it replaces, below which it is not made. */
const LEAST_GAIN = 1e-6;
/** Sweeps of node moves after each round of changes. */
const SWEEPS_A_ROUND = 3;
/** Gain of a round, as a share of the cost, below which topology is left alone. */
const ROUND_GAIN = 1e-5;
const MOST_ROUNDS = 60;
/** Gain, as a share of the cost of its tubes, for which `quick` moves a node. */
const QUICK_GAIN = 1e-3;
/** Rounds of which one tries exchanges too. */
const EXCHANGE_ROUNDS = 4;
/**
 * Work after which the room's grid is made anew, and with it the state fit to be saved: in sweeps of node moves, about as
 * much of which a look at all subtrees for other places comes to, and for exchanges.
 */
const FRESH = 3;
const SWEEPS_A_HANG = 8;
const SWEEPS_AN_EXCHANGE = 4;

/** How hard a tree is refined. */
export type Budget =
  | { readonly kind: 'none' }
  /** Sweeps until one gains little, with a look at the 20,000 subtrees that carry most. */
  | { readonly kind: 'quick' }
  /** Rounds over all subtrees until one gains next to nothing, then sweeps until one gains less than 10⁻⁹. */
  | { readonly kind: 'thorough' }
  /** Changes that may cost something first, less and less of it as it cools; then as `thorough`. */
  | { readonly kind: 'annealed'; readonly random: Random }
  /** So many steps of `thorough`, whatever they gain. */
  | { readonly kind: 'steps'; readonly steps: number };

export interface RefineOptions extends Watch {
  readonly budget: Budget;
  /** Threads that look for better places together; the result is the same. */
  readonly crew?: Crew | undefined;
  /** Looked at after each step with the cost so far (W); true ends the work. */
  readonly enough?: ((step: number, cost: number) => boolean) | undefined;
  /** Told at each moment at which the work could be saved, beside its forest and room, from which `resume` goes on. */
  readonly onMoment?: ((save: (out: StateOut) => void) => void) | undefined;
  readonly resume?: StateIn | undefined;
}

export interface RefineResult {
  /** Steps taken: sweeps of node moves, or looks at up to 20,000 subtrees. */
  readonly steps: number;
  /** W, before and after. */
  readonly before: number;
  readonly after: number;
  readonly stopped: 'converged' | 'budget' | 'cancelled';
}

/**
 * Lowers the cost of a forest by moving its nodes, hanging subtrees elsewhere and exchanging them. The forest is
 * feasible after every change; flows at terminals stay.
 *
 * Cost: O(rows) a sweep, about 1 µs a row; 20 to 60 µs a subtree looked at.
 */
export function refineForest(builder: ForestBuilder, room: Room, spec: Spec, options: RefineOptions): RefineResult {
  const refiner = new Refiner(builder, room, spec, options);
  refiner.run();
  return refiner.result();
}

class Refiner {
  private readonly builder: ForestBuilder;
  private readonly room: Room;
  private readonly spec: Spec;
  private readonly options: RefineOptions;
  private readonly sweeper: Sweeper;
  private readonly memory: Memory;
  private readonly potential: Potential;
  private readonly rehanger: Rehanger;
  private readonly exchanger: Exchanger;
  private weight: Float64Array;
  private readonly before: number;
  private cost: number;
  private steps = 0;
  private stopped: RefineResult['stopped'] = 'converged';
  /** Progress, in steps. */
  private expected = 1;
  private readonly course: Course;
  /** (trees) first vessels' loads, and rows, at the beginning. */
  private readonly wholes: readonly number[];
  private readonly prices: readonly number[];
  /** W; what of the cost stays whatever is changed, beside what prices say. */
  private readonly unpriced: number;
  private readonly rowsBefore: number;
  /** Done since the grid was made anew, in sweeps. */
  private work = 0;

  constructor(builder: ForestBuilder, room: Room, spec: Spec, options: RefineOptions) {
    this.builder = builder;
    this.room = room;
    this.spec = spec;
    this.options = options;
    this.memory = options.crew?.memory ?? ownMemory;
    this.sweeper = new Sweeper(builder, room, options.crew ?? null, 1, 0);
    const { resume = null, budget } = options;
    this.course = new Course(resume);
    this.wholes = resume === null ? wholeLoads(builder) : Array.from(resume.reals('wholes'));
    this.prices = resume === null ? pumpingPrices(builder, spec) : Array.from(resume.reals('prices'));
    const perLength = powerOfLoad(builder, spec, this.wholes, this.prices);
    this.potential = new Potential(builder, undefined, perLength);
    this.rehanger = new Rehanger(builder, room, this.potential, perLength);
    this.exchanger = new Exchanger(builder, room, perLength);
    if (resume === null) room.settle();
    this.weight = tubeWeights(builder, spec, this.prices, this.memory);
    this.before = resume === null ? costOf(builder, tubeWeights(builder, spec)) : resume.reals('before')[0]!;
    this.unpriced = resume === null ? this.before - costOf(builder, this.weight) : resume.reals('before')[2]!;
    this.cost = this.before;
    this.rowsBefore = resume === null ? builder.count : resume.reals('before')[1]!;
    if (budget.kind === 'annealed' && resume !== null) budget.random.resume(resume.reals('random'));
    if (resume === null) this.freshen();
  }

  private save(out: StateOut): void {
    const { budget } = this.options;
    out.list('wholes', 'f64', this.wholes);
    out.list('before', 'f64', [this.before, this.rowsBefore, this.unpriced]);
    out.list('prices', 'f64', this.prices);
    if (budget.kind === 'annealed') out.list('random', 'f64', budget.random.state());
    this.course.save(out);
  }

  /** Makes the grid anew; what is to come then follows from forest, reserves and course. */
  private freshen(): void {
    this.work = 0;
    this.room.rebuild(this.room.cell);
    this.options.onMoment?.((out) => this.save(out));
  }

  /** Whether the next step was done before the state was saved that this goes on from. */
  private isPast(): boolean {
    return this.course.isPast(this.steps);
  }

  result(): RefineResult {
    return { steps: this.steps, before: this.before, after: this.cost, stopped: this.stopped };
  }

  run(): void {
    const { budget } = this.options;
    switch (budget.kind) {
      case 'none':
        return;
      case 'quick': {
        this.expected = 16;
        this.sweeper.gain = QUICK_GAIN;
        if (!this.sweepUntil(1e-3, 6)) return;
        const rows = this.heaviest(ROWS_A_STEP);
        if (!this.hangStep(rows) || !this.sweepUntil(5e-4, 8)) return;
        break;
      }
      case 'annealed':
        if (!this.anneal(budget.random)) return;
        this.settleTopology(MOST_ROUNDS, ROUND_GAIN);
        if (this.stopped === 'converged') this.sweepUntil(1e-9, 2000);
        break;
      case 'thorough':
        this.settleTopology(MOST_ROUNDS, ROUND_GAIN);
        if (this.stopped === 'converged') this.sweepUntil(1e-9, 2000);
        break;
      case 'steps':
        this.expected = budget.steps;
        this.settleTopology(Number.POSITIVE_INFINITY, Number.NEGATIVE_INFINITY);
        break;
    }
    this.sumUp();
  }

  /** Rounds of sweeps, hangings and exchanges over all subtrees. */
  private settleTopology(rounds: number, least: number): void {
    for (let round = 0; round < rounds; round++) {
      const cost = this.cost;
      for (let k = 0; k < SWEEPS_A_ROUND; k++) if (!this.sweepStep()) return;
      const rows = this.heaviest(this.builder.count);
      const parts = Math.max(1, Math.ceil(rows.length / ROWS_A_STEP));
      if (this.options.budget.kind !== 'steps') this.expected = this.steps + 5 * (SWEEPS_A_ROUND + parts);
      for (let part = 0; part < parts; part++) {
        const some = rows.subarray(part * ROWS_A_STEP, (part + 1) * ROWS_A_STEP);
        if (!this.hangStep(some)) return;
        // They gain a tenth of what hanging gains, for as much work.
        if (round % EXCHANGE_ROUNDS === EXCHANGE_ROUNDS - 1 && !this.exchangeStep(some)) return;
      }
      if (cost - this.cost <= least * cost) return;
    }
  }

  /** Sweeps until one gains less than a share of the cost; false where the budget is spent. */
  private sweepUntil(tolerance: number, most: number): boolean {
    for (let k = 0; k < most; k++) {
      const cost = this.cost;
      if (!this.sweepStep()) return false;
      if (cost - this.cost <= tolerance * cost) break;
    }
    return true;
  }

  private sweepStep(): boolean {
    if (this.isPast()) return this.endStep();
    this.sweeper.sweep(this.weight);
    return this.endStep();
  }

  private hangStep(rows: Int32Array): boolean {
    if (this.isPast()) return this.endStep();
    this.work += (SWEEPS_A_HANG * rows.length) / this.builder.count;
    this.refreshPotentials();
    for (const row of rows) if (this.builder.parent[row]! >= 0) this.rehanger.rehang(row, LEAST_GAIN);
    this.weight = tubeWeights(this.builder, this.spec, this.prices, this.memory);
    return this.endStep();
  }

  private exchangeStep(rows: Int32Array): boolean {
    if (this.isPast()) return this.endStep();
    this.work += (SWEEPS_AN_EXCHANGE * rows.length) / this.builder.count;
    for (const row of rows) if (this.builder.parent[row]! >= 0) this.exchanger.exchange(row, LEAST_GAIN);
    this.weight = tubeWeights(this.builder, this.spec, this.prices, this.memory);
    return this.endStep();
  }

  /**
   * Hangs subtrees, drawn by lot, elsewhere even where that costs a little: with temperature T a loss of ΔW is let pass
   * with likelihood exp(−ΔW/T). T falls from a tenth of a tube's mean cost to a thousandth.
   * Source: simulated annealing, S. Kirkpatrick et al. (1983), Science 220:671; from memory.
   */
  private anneal(random: Random): boolean {
    const { builder } = this;
    const rounds = 12;
    const hot = (0.1 * this.before) / this.rowsBefore;
    this.expected = 4 * rounds;
    for (let round = 0; round < rounds; round++) {
      const temperature = hot * Math.exp((-round * Math.log(100)) / (rounds - 1));
      const rows = this.heaviest(builder.count);
      if (!this.annealStep(rows, temperature, random)) return false;
      for (let k = 0; k < SWEEPS_A_ROUND; k++) if (!this.sweepStep()) return false;
    }
    return true;
  }

  private annealStep(rows: Int32Array, temperature: number, random: Random): boolean {
    if (this.isPast()) return this.endStep();
    const { builder } = this;
    this.work += SWEEPS_A_HANG;
    this.refreshPotentials();
    const tries = rows.length;
    for (let k = 0; k < tries; k++) {
      const row = rows[Math.floor(random.next() * rows.length)]!;
      const spare = -temperature * Math.log(1 - random.next());
      if (builder.parent[row]! >= 0) this.rehanger.rehang(row, 0, spare);
    }
    this.weight = tubeWeights(builder, this.spec, this.prices, this.memory);
    return this.endStep();
  }

  /** Counts a step; false where the budget is spent or the work is to stop. */
  private endStep(): boolean {
    const { options } = this;
    const past = this.isPast();
    this.steps++;
    if (past) {
      this.cost = this.course.costAfter(this.steps);
      return true;
    }
    this.cost = this.unpriced + costOf(this.builder, this.weight);
    this.course.addStep(this.cost);
    options.onProgress?.({
      stage: 'refine',
      done: Math.min(this.steps, this.expected),
      total: Math.max(this.steps + 1, this.expected),
    });
    if (options.signal?.aborted) {
      this.stopped = 'cancelled';
      return false;
    }
    const spent = options.budget.kind === 'steps' && this.steps >= options.budget.steps;
    if ((options.enough?.(this.steps, this.cost) ?? false) || spent) {
      this.stopped = 'budget';
      this.sumUp();
      return false;
    }
    if (this.work >= FRESH) this.freshen();
    return true;
  }

  /** Rows of the tubes that carry most, the most first, ties by row. */
  private heaviest(most: number): Int32Array {
    const { builder } = this;
    if (this.isPast()) return this.course.pastLook();
    // Sorting loads alone is many times faster than sorting rows by load.
    const loads = builder.load.slice(0, builder.count);
    for (let row = 0; row < builder.count; row++) if (builder.parent[row]! < 0) loads[row] = -1;
    loads.sort();
    const least = most < loads.length ? Math.max(loads[loads.length - most]!, 0) : 0;
    const rows: number[] = [];
    for (let row = 0; row < builder.count; row++) {
      if (builder.parent[row]! >= 0 && builder.load[row]! >= least) rows.push(row);
    }
    const sorted = Int32Array.from(rows).sort((a, b) => builder.load[b]! - builder.load[a]! || a - b);
    const heaviest = sorted.subarray(0, most);
    this.course.addLook(heaviest);
    return heaviest;
  }

  private refreshPotentials(): void {
    const { builder } = this;
    for (let t = 0; t < builder.roots.length; t++) {
      const order = builder.preorder(t);
      if (order.length < 2) continue;
      let terminals = 0;
      for (const row of order) if (builder.child[2 * row]! < 0) terminals++;
      this.potential.refresh(order, builder.load[order[1]!]! / terminals);
    }
  }

  /** Sums loads and weights anew from the terminals, so that what changes have rounded does not add up. */
  private sumUp(): void {
    const { builder } = this;
    for (let t = 0; t < builder.roots.length; t++) {
      const order = builder.preorder(t);
      for (let k = order.length - 1; k > 0; k--) {
        const row = order[k]!;
        const a = builder.child[2 * row]!;
        if (a < 0) continue;
        const b = builder.child[2 * row + 1]!;
        builder.load[row] = builder.load[a]! + (b < 0 ? 0 : builder.load[b]!);
        builder.weight[row] = builder.weight[a]! + (b < 0 ? 0 : builder.weight[b]!);
      }
    }
    this.room.settle();
  }
}
