import { unzlibSync } from 'fflate';

/** Two bytes of head, four of checksum. */
const FRAME = 6;

/**
 * Unpacks a zlib stream whose unpacked size is known.
 *
 * @param out  written from `to` on
 * @param size bytes that shall come out, `to + size` ≤ length of `out`
 * @returns    null, or the end of a sentence on what is wrong with the stream
 * Source: RFC 1950. fflate 0.8.2 neither looks at the checksum nor minds an output too long for its buffer, so both are
 *         seen to here.
 */
export function unpackZlib(packed: Uint8Array, out: Uint8Array, to: number, size: number): string | null {
  if (packed.length <= FRAME) return `is ${packed.length} bytes long, expected more than ${FRAME}`;
  let data: Uint8Array;
  try {
    // One byte to spare shows an output that is too long.
    data = unzlibSync(packed, { out: new Uint8Array(size + 1) });
  } catch (error) {
    return `does not unpack: ${error instanceof Error ? error.message : error}`;
  }
  if (data.length !== size) return `unpacks to ${data.length > size ? 'more' : data.length} bytes, expected ${size}`;
  const sum = new DataView(packed.buffer, packed.byteOffset + packed.length - 4, 4).getUint32(0);
  if (adler32(data) !== sum) return 'does not match its checksum';
  out.set(data, to);
  return null;
}

/** Source: RFC 1950, section 8: two sums modulo 65521, the largest prime below 2¹⁶. */
function adler32(bytes: Uint8Array): number {
  let a = 1;
  let b = 0;
  for (let at = 0; at < bytes.length; ) {
    // So few bytes that b stays below 2³¹, where whole numbers are fast: 65520 · 3801 + 255 · 3800 · 3801 / 2 < 2³¹.
    const end = Math.min(bytes.length, at + 3800);
    for (; at < end; at++) {
      a += bytes[at]!;
      b += a;
    }
    a %= 65521;
    b %= 65521;
  }
  return b * 65536 + a;
}
