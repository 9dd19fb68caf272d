import { StateIn, StateOut } from '../../src/core/state.ts';
import type { ByteSource } from '../../src/formats/format.ts';
import { encodeState, openState, type StateHead } from '../../src/formats/state-file.ts';

/* States saved to bytes in memory, as a run of the program saves them to a file. */

export const HEAD: StateHead = { program: 'test 1', work: 'a' };

/** All that something saves, as the bytes of a file. */
export function savedBytes(save: (out: StateOut) => void, head = HEAD): Uint8Array {
  const out = new StateOut();
  save(out);
  const pieces = [...encodeStatePieces(head, out)];
  const bytes = new Uint8Array(pieces.reduce((sum, piece) => sum + piece.length, 0));
  let at = 0;
  for (const piece of pieces) {
    bytes.set(piece, at);
    at += piece.length;
  }
  return bytes;
}

function* encodeStatePieces(head: StateHead, out: StateOut): Generator<Uint8Array> {
  for (const piece of encodeState(head, out.columns)) yield piece.slice();
}

/** The state in some bytes. */
export function openBytes(bytes: Uint8Array, head = HEAD): StateIn {
  return new StateIn(openState(sourceOf(bytes), head));
}

export function sourceOf(bytes: Uint8Array): ByteSource {
  return {
    name: 'some.snapshot',
    size: bytes.length,
    readInto: (from, out) => out.set(bytes.subarray(from, from + out.length)),
  };
}
