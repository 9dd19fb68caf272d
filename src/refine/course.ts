import type { StateIn, StateOut } from '../core/state.ts';

/**
 * The course of a refinement so far: all that its schedule decides by. A refinement that goes on from a saved state runs
 * through its schedule again and takes from here what each step came to, until it stands where it was.
 */
export class Course {
  /** W; cost after each step. */
  private readonly costs: number[] = [];
  /** Rows that each look for the heaviest came to, and those of the last. */
  private readonly looks: number[] = [];
  private rows: Int32Array = new Int32Array(0);
  /** Steps and looks that were saved, and looks taken up again. */
  private readonly pastSteps: number;
  private readonly pastLooks: number;
  private look = 0;

  constructor(saved: StateIn | null) {
    if (saved !== null) {
      this.costs = Array.from(saved.reals('costs'));
      this.looks = Array.from(saved.wholes('looks'));
      this.rows = saved.wholes('rows');
    }
    this.pastSteps = this.costs.length;
    this.pastLooks = this.looks.length;
  }

  save(out: StateOut): void {
    out.list('costs', 'f64', this.costs);
    out.list('looks', 'i32', this.looks);
    out.put('rows', this.rows);
  }

  /** Whether the step that follows so many was done before the state was saved. */
  isPast(steps: number): boolean {
    return steps < this.pastSteps;
  }

  /** W; cost after so many steps. */
  costAfter(steps: number): number {
    return this.costs[steps - 1]!;
  }

  addStep(cost: number): void {
    this.costs.push(cost);
  }

  /** What the next look came to; of all but the last only how many, for all that was done with them is past. */
  pastLook(): Int32Array {
    const k = this.look++;
    return k === this.pastLooks - 1 ? this.rows : new Int32Array(this.looks[k]!);
  }

  addLook(rows: Int32Array): void {
    this.looks.push(rows.length);
    this.rows = rows;
  }
}
