import { inputError } from '../../core/errors.ts';
import type { TriangleSurface } from '../../core/surface.ts';
import { mergeCorners } from './corners.ts';
import { quoted, TextReader, textOf } from './text-reader.ts';

const HEADER = 84;
const RECORD = 50;

/**
 * Reads STL, ASCII (any number of solids, taken together) or binary, whichever it is: a file whose length is what its
 * binary count asks for is binary even if it starts with `solid`. Normals and names are not looked at.
 *
 * @param file named in messages
 * @returns    coordinates in the file's own unit
 * @throws  InputError naming the line or the byte: truncated, wrong count, not finite, empty, not STL
 */
export function decodeStl(bytes: Uint8Array, file: string): TriangleSurface {
  if (bytes.length === 0) throw inputError('empty-surface', file, 'got an empty file, expected STL');
  const view = new DataView(bytes.buffer, bytes.byteOffset, bytes.byteLength);
  const claimed = bytes.length >= HEADER ? view.getUint32(80, true) : -1;
  if (claimed >= 0 && bytes.length === HEADER + RECORD * claimed) return decodeBinary(view, claimed, file);
  if (looksAscii(bytes)) return decodeAscii(bytes, file);
  if (looksText(bytes)) throw inputError('bad-syntax', file, 'got text that does not start with "solid", expected STL');
  if (claimed < 0)
    throw inputError(
      'truncated',
      file,
      `got ${bytes.length} bytes, expected text that starts with "solid" or at least ${HEADER} bytes of binary STL`,
    );
  const wanted = HEADER + RECORD * claimed;
  const code = bytes.length < wanted ? 'truncated' : 'wrong-count';
  const how = bytes.length < wanted ? 'a truncated file' : 'bytes left over';
  throw inputError(
    code,
    file,
    `got ${how}: ${bytes.length} bytes, expected ${wanted} for the ${claimed} triangles counted at byte 80`,
  );
}

/** Starts with `solid` and is text as far as its first kilobyte shows. */
function looksAscii(bytes: Uint8Array): boolean {
  return looksText(bytes) && /^(?:\xef\xbb\xbf)?\s*solid/i.test(textOf(bytes, 0, Math.min(bytes.length, 64)));
}

/** No zero byte and hardly another control character in the first kilobyte: binary STL has a count and floats there. */
function looksText(bytes: Uint8Array): boolean {
  const head = bytes.subarray(0, 1024);
  if (head.includes(0)) return false;
  let odd = 0;
  for (const byte of head) if (byte < 32 && byte !== 9 && byte !== 10 && byte !== 13) odd++;
  return odd <= 0.02 * head.length;
}

function decodeBinary(view: DataView, count: number, file: string): TriangleSurface {
  if (count === 0) throw inputError('empty-surface', file, 'got an empty surface of 0 triangles, expected some');
  const corner = new Float64Array(9 * count);
  for (let t = 0; t < count; t++) {
    for (let i = 0; i < 9; i++) {
      const at = HEADER + RECORD * t + 12 + 4 * i;
      const value = view.getFloat32(at, true);
      if (!Number.isFinite(value))
        throw inputError('non-finite', file, `got ${value} at byte ${at} (triangle ${t}), expected a finite number`);
      corner[9 * t + i] = value;
    }
  }
  return mergeCorners(corner, sequence(3 * count));
}

function decodeAscii(bytes: Uint8Array, file: string): TriangleSurface {
  const reader = new TextReader(bytes, file, bytes[0] === 0xef ? 3 : 0);
  const corner: number[] = [];
  const expect = (wanted: string): void => {
    const word = reader.word();
    if (word.toLowerCase() === wanted) return;
    if (word === '') throw reader.fault('truncated', `got the end of a truncated file, expected "${wanted}"`);
    throw reader.fault('bad-syntax', `got ${quoted(word)}, expected "${wanted}"`);
  };
  expect('solid');
  reader.skipLine();
  let inSolid = true;
  for (;;) {
    const word = reader.word().toLowerCase();
    if (inSolid && word === 'facet') {
      for (let i = 0; i < 4; i++) reader.word();
      expect('outer');
      expect('loop');
      for (let k = 0; k < 3; k++) {
        expect('vertex');
        for (const axis of ['x', 'y', 'z']) corner.push(reader.real(reader.word(), axis));
      }
      expect('endloop');
      expect('endfacet');
    } else if (inSolid && word === 'endsolid') {
      inSolid = false;
      reader.skipLine();
    } else if (!inSolid && word === 'solid') {
      inSolid = true;
      reader.skipLine();
    } else if (!inSolid && word === '') break;
    else if (word === '')
      throw reader.fault('truncated', 'got the end of a truncated file, expected "facet" or "endsolid"');
    else
      throw reader.fault(
        'bad-syntax',
        `got ${quoted(word)}, expected ${inSolid ? '"facet" or "endsolid"' : '"solid" or the end'}`,
      );
  }
  if (corner.length === 0)
    throw inputError('empty-surface', file, 'got an empty surface without facets, expected some');
  return mergeCorners(corner, sequence(corner.length / 3));
}

function sequence(count: number): Int32Array {
  const out = new Int32Array(count);
  for (let i = 0; i < count; i++) out[i] = i;
  return out;
}
