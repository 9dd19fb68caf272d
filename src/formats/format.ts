import type { TreeRecord } from '../tree/forest.ts';

/** A file's name, as messages shall call it, and content. */
export interface NamedBytes {
  readonly name: string;
  readonly bytes: Uint8Array;
}

/** A file that is read where it lies, part by part, because it may be larger than one wants to hold. */
export interface ByteSource {
  readonly name: string;
  /** Bytes. */
  readonly size: number;
  /** Fills `out` with the bytes from a place on; there are as many left. `out` is the caller's to keep. */
  readInto(from: number, out: Uint8Array): void;
}

/** One file that an encoder made: what its name ends in, and content. */
export interface EncodedFile {
  readonly suffix: string;
  /** The whole file. */
  readonly bytes: Uint8Array;
  /** The file piece by piece where it may be large: `bytes` is then put together when it is asked for. */
  readonly pieces?: Iterable<Uint8Array> | undefined;
}

/** A tree read from elsewhere, and what had to be supplied or left out. */
export interface DecodedTree {
  readonly record: TreeRecord;
  /** Sentences for the user; empty where the file held everything. */
  readonly notes: readonly string[];
}

/** What of a TreeRecord a format can hold. */
export type Kept =
  | 'positions'
  | 'radii'
  | 'flows'
  | 'tree index'
  | 'tree names and kinds'
  | 'orders'
  | 'flow solution'
  | 'territories'
  | 'provenance';

export interface TreeFormat {
  readonly id: string;
  /** One line of what it is, for help and README. */
  readonly title: string;
  /** With the dot; the first is the usual one. */
  readonly extensions: readonly string[];
  /** Ends of the names of the files it is made of, in the order that encode gives and decode takes them. */
  readonly parts: readonly string[];
  /** The units written. */
  readonly units: string;
  /** Largest relative change of a number on the way out and back; 0: bit for bit. */
  readonly precision: number;
  readonly keeps: readonly Kept[];
  readonly drops: readonly Kept[];
  /** @returns one file a part */
  encode(record: TreeRecord): EncodedFile[];
  /**
   * @param files one a part
   * @throws InputError naming every place that is broken
   */
  decode(files: readonly NamedBytes[]): DecodedTree;
  /**
   * The same of a file that is read part by part; formats of one file that may be large have it.
   *
   * @throws InputError naming every place that is broken
   */
  readonly decodeSource?: ((source: ByteSource) => DecodedTree) | undefined;
}
