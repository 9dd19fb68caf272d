import { inputError } from './errors.ts';

/** What a column of a saved state is made of: 64-bit reals, 32-bit whole numbers, or bytes. */
export type ColumnKind = 'f64' | 'i32' | 'u8';
export type Column = Float64Array | Int32Array | Uint8Array;

export interface StateColumn {
  readonly name: string;
  readonly kind: ColumnKind;
  /** Good until whoever gave it goes on: no copy. */
  readonly values: Column | readonly number[];
}

/**
 * Where things put all from which they could go on. Each puts its own under a name of its own; nothing is copied, so what
 * is put must be used before the work goes on.
 */
export class StateOut {
  readonly columns: StateColumn[];
  private readonly prefix: string;

  constructor(columns: StateColumn[] = [], prefix = '') {
    this.columns = columns;
    this.prefix = prefix;
  }

  /** The same state, for a part of it. */
  within(part: string): StateOut {
    return new StateOut(this.columns, `${this.prefix}${part}.`);
  }

  put(name: string, values: Column): void {
    const kind = values instanceof Float64Array ? 'f64' : values instanceof Int32Array ? 'i32' : 'u8';
    this.columns.push({ name: this.prefix + name, kind, values });
  }

  /** Puts numbers that stand in no column. */
  list(name: string, kind: 'f64' | 'i32', values: readonly number[]): void {
    this.columns.push({ name: this.prefix + name, kind, values });
  }
}

/** Columns as they were saved, wherever they lie. */
export interface StateSource {
  /** As messages shall call it. */
  readonly name: string;
  /** Values of a column, or −1 where there is none of that name and kind. */
  length(name: string, kind: ColumnKind): number;
  /** Fills the first values of a column of that kind, which may be longer. */
  readInto(name: string, out: Column): void;
}

/**
 * The other way: where things find what they put.
 *
 * Its methods throw InputError where a column is missing or longer than it may be: another program has saved it.
 */
export class StateIn {
  private readonly source: StateSource;
  private readonly prefix: string;

  constructor(source: StateSource, prefix = '') {
    this.source = source;
    this.prefix = prefix;
  }

  within(part: string): StateIn {
    return new StateIn(this.source, `${this.prefix}${part}.`);
  }

  /** Whether a column of whole numbers was put. */
  hasWholes(name: string): boolean {
    return this.source.length(this.prefix + name, 'i32') >= 0;
  }

  /** A column of reals, in a new array or in the beginning of a given one. */
  reals(name: string, out: Float64Array = new Float64Array(this.lengthOf(name, 'f64'))): Float64Array {
    return this.fill(name, 'f64', out);
  }

  /** A column of whole numbers, in a new array or in the beginning of a given one. */
  wholes(name: string, out: Int32Array = new Int32Array(this.lengthOf(name, 'i32'))): Int32Array {
    return this.fill(name, 'i32', out);
  }

  private fill<T extends Column>(name: string, kind: ColumnKind, out: T): T {
    const length = this.lengthOf(name, kind);
    if (length > out.length) throw this.mismatch(name);
    this.source.readInto(this.prefix + name, out);
    return out;
  }

  private lengthOf(name: string, kind: ColumnKind): number {
    const length = this.source.length(this.prefix + name, kind);
    if (length < 0) throw this.mismatch(name);
    return length;
  }

  private mismatch(name: string): Error {
    const message = `got a state whose ${this.prefix}${name} is not what this program would have saved, expected one that it has`;
    return inputError('snapshot', this.source.name, message);
  }
}
