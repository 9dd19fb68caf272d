/** s over which a pace is taken: long enough to hold the steps that come now and then, short enough to follow a change. */
const WINDOW = 30;
/** Marks kept in that time. */
const MARKS = 60;

/**
 * How fast a stage of work goes, and how long it will still take, from what was done in the last half minute. What was
 * done before it was first seen, by an interrupted run, does not count.
 */
export class Pace {
  private marks: { readonly time: number; readonly done: number }[] = [];
  private total = 1;

  /** @param time s, by any clock that does not run back */
  see(time: number, done: number, total: number): void {
    const last = this.marks[this.marks.length - 1];
    // Where work was undone and is done again, the pace is taken anew.
    if (last !== undefined && done < last.done) this.marks = [];
    if (total !== this.total && this.total !== 1) this.marks = this.marks.slice(-1);
    this.total = total;
    while (this.marks.length > 1 && this.marks[1]!.time <= time - WINDOW) this.marks.shift();
    const before = this.marks[this.marks.length - 2];
    // The last mark is the newest; it moves until it is far enough from the one before.
    if (before !== undefined && last !== undefined && last.time - before.time < WINDOW / MARKS) this.marks.pop();
    this.marks.push({ time, done });
  }

  /** Units a second; 0 before it can be told. */
  get rate(): number {
    const first = this.marks[0];
    const last = this.marks[this.marks.length - 1];
    if (first === undefined || last === undefined || last.time - first.time < 1) return 0;
    return (last.done - first.done) / (last.time - first.time);
  }

  /** s left; null before it can be told. */
  get left(): number | null {
    const last = this.marks[this.marks.length - 1];
    return this.rate > 0 && last !== undefined ? Math.max(0, this.total - last.done) / this.rate : null;
  }
}
