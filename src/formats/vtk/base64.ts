const ALPHABET = 'ABCDEFGHIJKLMNOPQRSTUVWXYZabcdefghijklmnopqrstuvwxyz0123456789+/';
const PAD = 64;
const SPACE = 65;
const BAD = 66;

function buildTable(): Uint8Array {
  const table = new Uint8Array(256).fill(BAD);
  for (let i = 0; i < 64; i++) table[ALPHABET.charCodeAt(i)] = i;
  table['='.charCodeAt(0)] = PAD;
  for (const space of ' \t\r\n') table[space.charCodeAt(0)] = SPACE;
  return table;
}

/**
 * Bytes of base64 text. Padding may stand in the middle: some writers encode an array's header by itself.
 *
 * @param bytes text, white space passed over
 * @returns null where a character is none of base64, or a group is cut short
 * Source: RFC 4648, section 4.
 */
export function decodeBase64(bytes: Uint8Array): Uint8Array | null {
  const table = buildTable();
  const out = new Uint8Array(Math.floor((bytes.length * 3) / 4) + 3);
  let size = 0;
  let group = 0;
  let filled = 0;
  let pads = 0;
  for (let i = 0; i < bytes.length; i++) {
    const code = table[bytes[i]!]!;
    if (code === SPACE) continue;
    if (code === BAD || (code === PAD ? filled < 2 : pads > 0)) return null;
    if (code === PAD) pads++;
    group = (group << 6) | (code & 63);
    if (++filled < 4) continue;
    out[size] = (group >> 16) & 255;
    if (pads < 2) out[size + 1] = (group >> 8) & 255;
    if (pads < 1) out[size + 2] = group & 255;
    size += 3 - pads;
    group = 0;
    filled = 0;
    pads = 0;
  }
  return filled === 0 ? out.subarray(0, size) : null;
}
