import { inputError } from '../../core/errors.ts';
import { decodeText } from '../../core/text.ts';

/** A VTK XML file of appended raw data, open for reading its arrays by name. */
export interface AppendedFile {
  /** The fault of a file of this name. */
  readonly fail: (message: string) => Error;
  /** Bytes of an array of a section, copied; null where there is no such array. */
  readonly block: (section: string, name: string, type: string) => Uint8Array | null;
  /** The same, whose size must be whole tuples of so many bytes; a fault where there is no such array. */
  readonly needed: (section: string, name: string, type: string, tuple: number) => ArrayBuffer;
}

/**
 * Opens a VTK XML file of appended raw data, little-endian, UInt64 headers, one piece: what a mesh folder holds, no more of
 * VTK than that.
 *
 * @throws InputError where the file is cut short or is something else
 * Source: VTK XML formats as documented by Kitware.
 */
export function openAppended(file: string, bytes: Uint8Array, type: 'PolyData' | 'UnstructuredGrid'): AppendedFile {
  const fail = (message: string) => inputError(type === 'PolyData' ? 'bad-vtp' : 'bad-vtu', file, message);
  const mark = indexOf(bytes, '<AppendedData', 0);
  const start = mark < 0 ? -1 : bytes.indexOf(0x5f, mark);
  if (start < 0) throw fail('got no appended data: the file is cut short, or is no VTK XML file of this kind');
  const head = decodeText(bytes.subarray(0, start));
  for (const words of [`type="${type}"`, 'byte_order="LittleEndian"', 'header_type="UInt64"', 'encoding="raw"']) {
    if (!head.includes(words)) throw fail(`got no ${words}, which the files of a mesh folder have`);
  }
  if (indexOf(bytes, '</VTKFile>', bytes.length - 64) < 0) throw fail('the file is cut short: it has no end');
  const view = new DataView(bytes.buffer, bytes.byteOffset, bytes.byteLength);
  const block = (section: string, name: string, numbers: string): Uint8Array | null => {
    const inside = new RegExp(`<${section}>([^]*?)</${section}>`).exec(head)?.[1] ?? '';
    const tag = [...inside.matchAll(/<(?:Data)?Array ([^>]*)>/g)].find(([, words]) =>
      words!.includes(` Name="${name}"`),
    )?.[1];
    if (tag === undefined) return null;
    const offset = Number(/ offset="(\d+)"/.exec(tag)?.[1] ?? Number.NaN);
    if (!tag.includes(`type="${numbers}"`) || Number.isNaN(offset)) throw fail(`${name}: expected appended ${numbers}`);
    const from = start + 1 + offset;
    const size = from + 8 <= bytes.length ? Number(view.getBigUint64(from, true)) : Infinity;
    if (from + 8 + size > bytes.length) throw fail(`${name}: the file is cut short`);
    return bytes.slice(from + 8, from + 8 + size);
  };
  const needed = (section: string, name: string, numbers: string, tuple: number): ArrayBuffer => {
    const data = block(section, name, numbers);
    if (data === null) throw fail(`got no array ${name} in ${section}`);
    if (data.length % tuple !== 0) throw fail(`${name}: got ${data.length} bytes, expected a multiple of ${tuple}`);
    return data.buffer as ArrayBuffer;
  };
  return { fail, block, needed };
}

function indexOf(bytes: Uint8Array, text: string, from: number): number {
  const same = (at: number) => {
    for (let k = 0; k < text.length; k++) if (bytes[at + k] !== text.charCodeAt(k)) return false;
    return true;
  };
  let at = bytes.indexOf(text.charCodeAt(0), Math.max(0, from));
  while (at >= 0 && !same(at)) at = bytes.indexOf(text.charCodeAt(0), at + 1);
  return at;
}
