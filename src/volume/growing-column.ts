/** Whole numbers in a column that grows by doubling. */
export class GrowingRows {
  count = 0;
  values: Int32Array;

  constructor(room: number) {
    this.values = new Int32Array(Math.max(16, room));
  }

  /** Makes room for `more` and returns where they begin; they are counted in. */
  take(more: number): number {
    const start = this.count;
    this.count += more;
    if (this.count > this.values.length) {
      const wider = new Int32Array(2 * this.count);
      wider.set(this.values);
      this.values = wider;
    }
    return start;
  }

  push(value: number): void {
    // The column may be another after `take`.
    const at = this.take(1);
    this.values[at] = value;
  }

  trimmed(): Int32Array {
    return this.values.slice(0, this.count);
  }
}

/** Reals in a column that grows by doubling. */
export class GrowingReals {
  count = 0;
  values: Float64Array;

  constructor(room: number) {
    this.values = new Float64Array(Math.max(16, room));
  }

  /** Makes room for `more` and returns where they begin; they are counted in. */
  take(more: number): number {
    const start = this.count;
    this.count += more;
    if (this.count > this.values.length) {
      const wider = new Float64Array(2 * this.count);
      wider.set(this.values);
      this.values = wider;
    }
    return start;
  }

  trimmed(): Float64Array {
    return this.values.slice(0, this.count);
  }
}
