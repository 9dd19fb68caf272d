import type { StateIn, StateOut } from '../core/state.ts';

/** Which site of its tree's demand each terminal serves: a column that grows with the builder's rows. */
export class TerminalSites {
  /** (rows) site of a terminal's row; −1 elsewhere. */
  private siteOf: Int32Array = new Int32Array(1024).fill(-1);

  /** Site that a terminal's row serves, in its tree's demand. */
  of(row: number): number {
    return this.siteOf[row]!;
  }

  keep(row: number, site: number): void {
    if (row >= this.siteOf.length) {
      const wider = new Int32Array(Math.max(row + 1, 2 * this.siteOf.length)).fill(-1);
      wider.set(this.siteOf);
      this.siteOf = wider;
    }
    this.siteOf[row] = site;
  }

  forget(row: number): void {
    this.siteOf[row] = -1;
  }

  /** @param count rows of the builder */
  save(out: StateOut, count: number): void {
    out.put('siteOf', this.siteOf.subarray(0, count));
  }

  /** @param capacity rows that the builder has room for */
  restore(from: StateIn, capacity: number): void {
    this.siteOf = from.wholes('siteOf', new Int32Array(capacity).fill(-1));
  }
}
