import { type Memory, ownMemory } from '../core/memory.ts';
import type { ForestBuilder } from '../tree/builder.ts';
import { leastPowerPerLength, type PerLength } from './per-length.ts';
import { span } from './span.ts';

/*
 * Notation: Q a tube's load (shares below it), L its length; w = Q^(2/3) power per length; q̄ a usual terminal's share.
 *
 * Lab notes (box, γ = 3, one thread of a busy two-core machine, December 2026):
 * - Way up by the differential of w instead of a finite share, and a collapsed junction thrown 10 % of the way off (see
 *   junction-places.ts): 6 to 10 % dearer than the plain twin at 60 terminals; as now, within 2 %.
 */

/**
 * What one more terminal's flow costs on the way from the root to each node, for each share of it.
 *
 * It is the sum over the tubes of that way of ((Q + q̄)^(2/3) − Q^(2/3)) L / q̄, so one tube that a terminal might hang on
 * is judged in O(1). (The differential (2/3) Q^(−1/3) was tried first: it overstates the way up where Q is a few shares,
 * and trees of 60 came out 6 to 10 % dearer than the plain twin's.) Between two refreshes it is out of date by what was
 * hung in between.
 */
export class Potential {
  /** (capacity) potential of every row, power over share; replaced by a longer one in `follow`. */
  values: Float64Array;
  private readonly builder: ForestBuilder;
  private readonly memory: Memory;
  private readonly perLength: PerLength;
  private usual = 1;

  constructor(builder: ForestBuilder, memory: Memory = ownMemory, perLength: PerLength = leastPowerPerLength) {
    this.builder = builder;
    this.perLength = perLength;
    this.memory = memory;
    this.values = new Float64Array(memory(8 * builder.capacity));
  }

  /**
   * Computes every potential of a tree from its loads.
   *
   * @param order the tree's rows, parents first
   * @param usual share of a usual terminal, > 0
   * Cost: O(rows)
   */
  refresh(order: Int32Array, usual: number): void {
    const { builder } = this;
    this.follow();
    this.usual = usual;
    for (let k = 0; k < order.length; k++) {
      const row = order[k]!;
      const parent = builder.parent[row]!;
      if (parent < 0) this.values[row] = 0;
      else this.extend(row, parent);
    }
  }

  /** Computes the potential of one row from that of a row above it, by the straight way between them. */
  extend(row: number, above: number): void {
    const p = this.builder.position;
    const length = span(
      p[3 * row]! - p[3 * above]!,
      p[3 * row + 1]! - p[3 * above + 1]!,
      p[3 * row + 2]! - p[3 * above + 2]!,
    );
    this.values[row] = this.values[above]! + length * this.rise(this.builder.load[row]!, this.builder.tree[row]!);
  }

  /** Makes room for every row that the builder has room for. */
  follow(): void {
    if (this.values.length >= this.builder.capacity) return;
    const wider = new Float64Array(this.memory(8 * this.builder.capacity));
    wider.set(this.values);
    this.values = wider;
  }

  /** Cost per length and share of one more usual terminal on a tube. */
  private rise(load: number, tree: number): number {
    return (this.perLength(load + this.usual, tree) - this.perLength(load, tree)) / this.usual;
  }
}
