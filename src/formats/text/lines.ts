import { decodeText } from '../../core/text.ts';

/** Bytes turned into text at a time: a file of a gigabyte never becomes one string. */
const BLOCK = 1 << 20;

/**
 * Calls back for each line of UTF-8 text, without its end (LF or CR LF).
 *
 * @param bytes may start with a byte-order mark
 * @param visit gets the line and its number from 1
 * Cost: O(bytes), one block of text at a time; a single line may be longer than a block.
 */
export function eachLine(bytes: Uint8Array, visit: (line: string, number: number) => void): void {
  let number = 1;
  let from = 0;
  while (from < bytes.length) {
    let to = Math.min(from + BLOCK, bytes.length);
    if (to < bytes.length) {
      const end = bytes.lastIndexOf(10, to - 1);
      const next = bytes.indexOf(10, to);
      to = end >= from ? end + 1 : next < 0 ? bytes.length : next + 1;
    }
    const lines = decodeText(bytes.subarray(from, to)).split('\n');
    if (lines.at(-1) === '') lines.pop();
    for (const line of lines) visit(line.endsWith('\r') ? line.slice(0, -1) : line, number++);
    from = to;
  }
}
