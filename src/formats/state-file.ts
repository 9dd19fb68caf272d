import { inputError } from '../core/errors.ts';
import type { Column, ColumnKind, StateColumn, StateSource } from '../core/state.ts';
import { decodeText, encodeText } from '../core/text.ts';
import type { ByteSource } from './format.ts';

/*
 * A saved state as one file, for the machine that wrote it: magic, byte order and length of the head; the head, JSON that
 * names program, work and columns; the columns one after another, each from a multiple of eight bytes on; a checksum.
 */

const MAGIC = encodeText('vwstate1');
/** Reads otherwise where bytes go the other way round. */
const ORDER = 0x01020304;
const PREFIX = 16;
const TRAILER = 8;
/** Bytes written or read at once; a multiple of eight. */
const CHUNK = 1 << 20;
/** A head is a line a column: more than this is none. */
const MOST_HEAD = 1 << 24;
const WIDTH: Readonly<Record<ColumnKind, number>> = { f64: 8, i32: 4, u8: 1 };

/** What a state is of; one of another program or of other work is of no use. */
export interface StateHead {
  readonly program: string;
  /** Tells the work apart from any other: a digest of all that it depends on. */
  readonly work: string;
}

interface Head extends StateHead {
  readonly columns: readonly (readonly [name: string, kind: ColumnKind, length: number])[];
}

/** The file, piece by piece; each piece is good until the next is taken. */
export function* encodeState(head: StateHead, columns: readonly StateColumn[]): Generator<Uint8Array> {
  const whole: Head = { ...head, columns: columns.map(({ name, kind, values }) => [name, kind, values.length]) };
  const text = encodeText(JSON.stringify(whole));
  const first = new Uint8Array(padded(PREFIX + text.length)).fill(0x20);
  first.set(MAGIC);
  new Uint32Array(first.buffer, 8, 2).set([ORDER, first.length - PREFIX]);
  first.set(text, PREFIX);
  const sum = new Checksum();
  sum.add(first);
  yield first;
  const chunk = new Uint8Array(CHUNK);
  for (const { kind, values } of columns) {
    const window = viewOf(kind, chunk);
    for (let from = 0; from < values.length; from += window.length) {
      const count = Math.min(window.length, values.length - from);
      if (Array.isArray(values)) for (let k = 0; k < count; k++) window[k] = values[from + k]!;
      else window.set((values as Column).subarray(from, from + count));
      const bytes = count * WIDTH[kind];
      const piece = chunk.subarray(0, padded(bytes));
      piece.fill(0, bytes);
      sum.add(piece);
      yield piece;
    }
  }
  yield sum.bytes();
}

/**
 * Opens a saved state: reads it once from end to end, so that nothing of a broken one is used.
 *
 * @param wanted what it must be of
 * @returns      its columns, read from the source as they are asked for
 * @throws InputError where it is no such file, broken, or of another program or other work
 */
export function openState(source: ByteSource, wanted: StateHead): StateSource {
  const refuse = (got: string): never => {
    throw inputError('snapshot', source.name, `got ${got}, expected a whole snapshot of this run by this program`);
  };
  if (source.size < PREFIX + TRAILER || source.size % 8 !== 0) refuse('a file that is no snapshot or is cut short');
  const prefix = new Uint8Array(PREFIX);
  source.readInto(0, prefix);
  if (MAGIC.some((byte, k) => prefix[k] !== byte)) refuse('a file that is no snapshot, or one of another layout');
  const [order, length] = new Uint32Array(prefix.buffer, 8, 2) as unknown as [number, number];
  if (order !== ORDER) refuse('a snapshot that was written on another kind of machine');
  if (length > MOST_HEAD || PREFIX + length + TRAILER > source.size) refuse('a snapshot that is cut short');
  if (!isSound(source)) refuse('a snapshot that is broken or cut short: its checksum does not fit');
  const text = new Uint8Array(length);
  source.readInto(PREFIX, text);
  const head = JSON.parse(decodeText(text)) as Head;
  if (head.program !== wanted.program) refuse(`a snapshot of ${head.program}, where this is ${wanted.program}`);
  if (head.work !== wanted.work) refuse('a snapshot of another spec, seed, surface or budget');
  return columnsOf(source, head, PREFIX + length);
}

function columnsOf(source: ByteSource, head: Head, start: number): StateSource {
  const places = new Map<string, { readonly kind: ColumnKind; readonly length: number; readonly at: number }>();
  let at = start;
  for (const [name, kind, length] of head.columns) {
    places.set(name, { kind, length, at });
    at += padded(length * WIDTH[kind]);
  }
  return {
    name: source.name,
    length(name, kind) {
      const place = places.get(name);
      return place === undefined || place.kind !== kind ? -1 : place.length;
    },
    readInto(name, out) {
      const place = places.get(name)!;
      // Through a window of its own: columns may lie in memory that several threads see.
      const window = new Uint8Array(CHUNK);
      const values = viewOf(place.kind, window);
      for (let from = 0; from < place.length; from += values.length) {
        const count = Math.min(values.length, place.length - from);
        source.readInto(place.at + from * WIDTH[place.kind], window.subarray(0, count * WIDTH[place.kind]));
        out.set(values.subarray(0, count), from);
      }
    },
  };
}

function isSound(source: ByteSource): boolean {
  const sum = new Checksum();
  const chunk = new Uint8Array(CHUNK);
  const end = source.size - TRAILER;
  for (let at = 0; at < end; at += CHUNK) {
    const piece = chunk.subarray(0, Math.min(CHUNK, end - at));
    source.readInto(at, piece);
    sum.add(piece);
  }
  const told = new Uint8Array(TRAILER);
  source.readInto(end, told);
  return sum.bytes().every((byte, k) => byte === told[k]);
}

function viewOf(kind: ColumnKind, bytes: Uint8Array<ArrayBuffer>): Column {
  if (kind === 'u8') return bytes;
  return kind === 'f64' ? new Float64Array(bytes.buffer) : new Int32Array(bytes.buffer);
}

function padded(bytes: number): number {
  return Math.ceil(bytes / 8) * 8;
}

/** Two hashes by the rule of FNV-1a, one each over the even and the odd words of 32 bits: no single changed word keeps them. */
class Checksum {
  private even = 0x811c9dc5 | 0;
  private odd = 0x811c9dc5 | 0;

  /** @param bytes from a multiple of eight bytes on, as many as a multiple of eight */
  add(bytes: Uint8Array<ArrayBuffer>): void {
    const words = new Int32Array(bytes.buffer, bytes.byteOffset, bytes.length / 4);
    let { even, odd } = this;
    for (let k = 0; k < words.length; k += 2) {
      even = Math.imul(even ^ words[k]!, 0x01000193);
      odd = Math.imul(odd ^ words[k + 1]!, 0x01000193);
    }
    this.even = even;
    this.odd = odd;
  }

  bytes(): Uint8Array {
    return new Uint8Array(Int32Array.of(this.even, this.odd).buffer);
  }
}
