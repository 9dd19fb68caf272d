import { closeSync, fstatSync, fsyncSync, openSync, readSync, writeSync } from 'node:fs';
import { type ByteSource, inputError, type LateHead } from '../index.ts';

/** Bytes of one call to the system; it takes no more than 2 GiB. */
const STRETCH = 1 << 28;
/** Pieces smaller than this are gathered before they are written. */
const SMALL = 1 << 16;

/**
 * What a file is made of: bytes, a text, or pieces that follow one another, each good until the next is taken; or what
 * makes one of these when the file's turn comes. The first bytes may come last (`LateHead`).
 */
export type Content = Made | (() => Made);

type Made = Uint8Array | string | Iterable<Uint8Array> | LateHead;

/** Writes a new file of any size and hands it to the disk. */
export function writeContent(path: string, content: Content): void {
  const file = openSync(path, 'w');
  try {
    const gathered = new Uint8Array(SMALL);
    let size = 0;
    const flush = (): void => {
      writeWhole(file, gathered.subarray(0, size));
      size = 0;
    };
    const made = typeof content === 'function' ? content() : content;
    const late = isLate(made) ? made : null;
    if (late !== null) writeWhole(file, new Uint8Array(late.headSize));
    for (const piece of late?.pieces ?? piecesOf(made as Exclude<Made, LateHead>)) {
      if (size + piece.length > SMALL) flush();
      if (piece.length >= SMALL) writeWhole(file, piece);
      else {
        gathered.set(piece, size);
        size += piece.length;
      }
    }
    flush();
    if (late !== null) writeHead(file, late);
    fsyncSync(file);
  } finally {
    closeSync(file);
  }
}

function isLate(made: Made): made is LateHead {
  return typeof made === 'object' && 'headSize' in made;
}

function writeHead(file: number, { head, headSize }: LateHead): void {
  const bytes = head();
  for (let at = 0; at < headSize; ) at += writeSync(file, bytes, at, headSize - at, at);
}

function piecesOf(content: Exclude<Made, LateHead>): Iterable<Uint8Array> {
  if (typeof content === 'string') return [Buffer.from(content)];
  return content instanceof Uint8Array ? [content] : content;
}

function writeWhole(file: number, bytes: Uint8Array): void {
  for (let at = 0; at < bytes.length; ) at += writeSync(file, bytes, at, Math.min(STRETCH, bytes.length - at));
}

/**
 * Opens a file to be read part by part for as long as a step runs.
 *
 * @param name as messages shall call it
 */
export function withSource<T>(path: string, name: string, step: (source: ByteSource) => T): T {
  const file = openSync(path, 'r');
  try {
    return step({ name, size: fstatSync(file).size, readInto: (from, out) => readWhole(file, path, from, out) });
  } finally {
    closeSync(file);
  }
}

/** All of a regular file of any size: `readFileSync` gives up at 2 GiB. */
export function readAll(path: string): Uint8Array {
  return withSource(path, path, ({ size, readInto }) => {
    const bytes = new Uint8Array(size);
    readInto(0, bytes);
    return bytes;
  });
}

function readWhole(file: number, path: string, from: number, out: Uint8Array): void {
  for (let at = 0; at < out.length; ) {
    const got = readSync(file, out, at, Math.min(STRETCH, out.length - at), from + at);
    if (got === 0) throw inputError('truncated', path, `ends at byte ${from + at}: it changed while it was read`);
    at += got;
  }
}
