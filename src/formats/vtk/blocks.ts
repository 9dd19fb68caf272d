import type { ByteSource } from '../format.ts';
import { decodeBase64 } from './base64.ts';
import { unpackZlib } from './zlib.ts';

/** How a VTK XML file lays out the data of its arrays. */
export interface BlockCoding {
  readonly big: boolean;
  /** Bytes of a number in a header: 4 or 8. */
  readonly headerSize: number;
  /** Whether data is packed by zlib. */
  readonly packed: boolean;
}

/** Bytes that hold the data of several arrays. */
export interface Pool {
  readonly length: number;
  /** A view, or a buffer of its own; the bytes must be there. */
  take(from: number, length: number): Uint8Array;
}

/** The bytes of a file from one on. */
export function poolOf(content: Uint8Array | ByteSource, start: number): Pool {
  if (content instanceof Uint8Array) {
    return {
      length: content.length - start,
      take: (from, length) => content.subarray(start + from, start + from + length),
    };
  }
  return {
    length: content.size - start,
    take: (from, length) => {
      const out = new Uint8Array(length);
      content.readInto(start + from, out);
      return out;
    },
  };
}

/** Notes a fault of the array being read. */
export type Fail = (code: string, message: string) => null;

/**
 * The data of an array: what stands from a byte on, header first.
 *
 * @param bytes may go on after the data
 * @returns null after a fault
 * Source: VTK XML formats as documented by Kitware. Plain: `[bytes][data]`. Packed: `[blocks][bytes of a block][bytes of
 *         the last, 0: it is full][packed bytes of each block][blocks]`.
 */
export function readBlock(bytes: Pool, from: number, coding: BlockCoding, fail: Fail): Uint8Array | null {
  if (coding.packed) return unpack(bytes, from, coding, fail);
  if (from + coding.headerSize > bytes.length) return cutShort(bytes, from, fail);
  const size = readWord(bytes, from, coding);
  const start = from + coding.headerSize;
  const left = bytes.length - start;
  if (size > left) {
    return fail('truncated', `should be ${size} bytes long, ${left} are left: the file is cut short`);
  }
  return bytes.take(start, size);
}

/**
 * The data of an array written in base64.
 *
 * @param shared whether the texts of other arrays may follow
 * @returns null after a fault
 */
export function readBase64Block(text: Uint8Array, shared: boolean, coding: BlockCoding, fail: Fail): Uint8Array | null {
  const own = shared ? ownText(text, coding, fail) : text;
  if (own === null) return null;
  const decoded = decodeBase64(own);
  return decoded === null
    ? fail('base64', 'got text that is not base64')
    : readBlock(poolOf(decoded, 0), 0, coding, fail);
}

const inGroups = (count: number): number => 4 * Math.ceil(count / 3);

/** That part of the text that is one array's, as its header says. */
function ownText(text: Uint8Array, coding: BlockCoding, fail: Fail): Uint8Array | null {
  const start = (size: number): Uint8Array | null => {
    const head = decodeBase64(text.subarray(0, inGroups(size)));
    return head === null || head.length < size ? fail('base64', 'got no base64 header') : head;
  };
  let headerBytes = coding.headerSize;
  const head = start(headerBytes);
  if (head === null) return null;
  let size = readWord(poolOf(head, 0), 0, coding);
  if (coding.packed && size === 0) return text.subarray(0, inGroups(headerBytes));
  if (coding.packed) {
    headerBytes = (3 + size) * coding.headerSize;
    if (inGroups(headerBytes) > text.length) return cutShort(poolOf(text, 0), 0, fail);
    const whole = start(headerBytes);
    const header = whole === null ? null : readPackedHeader(poolOf(whole, 0), 0, coding, fail);
    if (header === null) return null;
    size = header.packedSize;
  }
  // The header may have been encoded by itself, with padding of its own.
  const apart = text[inGroups(headerBytes) - 1] === 0x3d;
  const length = apart ? inGroups(headerBytes) + inGroups(size) : inGroups(headerBytes + size);
  if (length > text.length) return fail('truncated', `should be ${size} bytes long: the file is cut short`);
  return text.subarray(0, length);
}

interface PackedHeader {
  readonly bytes: number;
  /** Bytes of each block but the last, and of the last. */
  readonly full: number;
  readonly last: number;
  /** (blocks) packed bytes of each. */
  readonly sizes: Float64Array;
  /** Their sum. */
  readonly packedSize: number;
}

function readPackedHeader(bytes: Pool, from: number, coding: BlockCoding, fail: Fail): PackedHeader | null {
  const { headerSize } = coding;
  if (from + headerSize > bytes.length) return cutShort(bytes, from, fail);
  const blocks = readWord(bytes, from, coding);
  // A writer may leave out the rest of the header where there is nothing.
  if (blocks === 0) return { bytes: headerSize, full: 0, last: 0, sizes: new Float64Array(0), packedSize: 0 };
  const length = (3 + blocks) * headerSize;
  if (length > bytes.length - from) {
    return fail(
      'truncated',
      `should have ${blocks} packed blocks, ${bytes.length - from} bytes are left: the file is cut short`,
    );
  }
  const full = readWord(bytes, from + headerSize, coding);
  const partial = readWord(bytes, from + 2 * headerSize, coding);
  const sizes = new Float64Array(blocks);
  let packedSize = 0;
  for (let k = 0; k < blocks; k++) {
    sizes[k] = readWord(bytes, from + (3 + k) * headerSize, coding);
    packedSize += sizes[k]!;
  }
  return { bytes: length, full, last: partial === 0 ? full : partial, sizes, packedSize };
}

/** Deflate makes at most 258 bytes of 2 bits; a header that promises more is broken, and no reason to take memory. */
const LARGEST_RATIO = 1032;

function unpack(bytes: Pool, from: number, coding: BlockCoding, fail: Fail): Uint8Array | null {
  const header = readPackedHeader(bytes, from, coding, fail);
  if (header === null) return null;
  const { full, last, sizes, packedSize } = header;
  let at = from + header.bytes;
  if (packedSize > bytes.length - at) {
    return fail(
      'truncated',
      `should be ${packedSize} bytes long, ${bytes.length - at} are left: the file is cut short`,
    );
  }
  const blocks = sizes.length;
  const total = blocks === 0 ? 0 : (blocks - 1) * full + last;
  if (total > LARGEST_RATIO * packedSize) {
    return fail(
      'packed',
      `got ${total} bytes packed into ${packedSize}, expected at most ${LARGEST_RATIO} times as many`,
    );
  }
  const out = new Uint8Array(total);
  for (let k = 0, to = 0; k < blocks; k++) {
    const size = k === blocks - 1 ? last : full;
    const problem = unpackZlib(bytes.take(at, sizes[k]!), out, to, size);
    if (problem !== null) return fail('packed', `block ${k} of ${blocks} ${problem}`);
    at += sizes[k]!;
    to += size;
  }
  return out;
}

function readWord(bytes: Pool, at: number, coding: BlockCoding): number {
  const word = bytes.take(at, coding.headerSize);
  const view = new DataView(word.buffer, word.byteOffset, coding.headerSize);
  return coding.headerSize === 8 ? Number(view.getBigUint64(0, !coding.big)) : view.getUint32(0, !coding.big);
}

function cutShort(bytes: Pool, from: number, fail: Fail): null {
  return fail('truncated', `starts at byte ${from} of ${bytes.length}: the file is cut short`);
}
