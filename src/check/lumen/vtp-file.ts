import { inputError } from '../../core/errors.ts';
import { decodeText } from '../../core/text.ts';
import type { Solids } from './solids.ts';

/** A surface with the unit of length its file states; null where it states none. */
export interface StatedSolids extends Solids {
  readonly unit: string | null;
}

/**
 * Reads a triangle surface with a text cell array `patch` from a VTK XML PolyData file of appended raw data,
 * little-endian, UInt64 headers, one piece: what a mesh folder holds, no more of VTK than that.
 *
 * @throws InputError where the file is cut short or is something else
 * Source: VTK XML formats as documented by Kitware.
 */
export function readVtpSolids(file: string, bytes: Uint8Array): StatedSolids {
  const fail = (message: string) => inputError('bad-vtp', file, message);
  const mark = indexOf(bytes, '<AppendedData', 0);
  const start = mark < 0 ? -1 : bytes.indexOf(0x5f, mark);
  if (start < 0) throw fail('got no appended data: the file is cut short, or is no VTK XML file of this kind');
  const head = decodeText(bytes.subarray(0, start));
  for (const words of ['type="PolyData"', 'byte_order="LittleEndian"', 'header_type="UInt64"', 'encoding="raw"']) {
    if (!head.includes(words)) throw fail(`got no ${words}, which the files of a mesh folder have`);
  }
  const view = new DataView(bytes.buffer, bytes.byteOffset, bytes.byteLength);
  const block = (section: string, name: string, type: string): Uint8Array | null => {
    const inside = new RegExp(`<${section}>([^]*?)</${section}>`).exec(head)?.[1] ?? '';
    const tag = [...inside.matchAll(/<(?:Data)?Array ([^>]*)>/g)].find(([, words]) =>
      words!.includes(` Name="${name}"`),
    )?.[1];
    if (tag === undefined) return null;
    const offset = Number(/ offset="(\d+)"/.exec(tag)?.[1] ?? Number.NaN);
    if (!tag.includes(`type="${type}"`) || Number.isNaN(offset)) throw fail(`${name}: expected appended ${type}`);
    const from = start + 1 + offset;
    const size = from + 8 <= bytes.length ? Number(view.getBigUint64(from, true)) : Infinity;
    if (from + 8 + size > bytes.length) throw fail(`${name}: the file is cut short`);
    return bytes.slice(from + 8, from + 8 + size);
  };
  const needed = (section: string, name: string, type: string): Uint8Array => {
    const data = block(section, name, type);
    if (data === null) throw fail(`got no array ${name} in ${section}`);
    return data;
  };
  const points = new Float64Array(whole(needed('Points', 'Points', 'Float64'), 24, fail));
  const corners = new Int32Array(whole(needed('Polys', 'connectivity', 'Int32'), 12, fail));
  const ends = new Int32Array(whole(needed('Polys', 'offsets', 'Int32'), 4, fail));
  const faces = corners.length / 3;
  if (ends.length !== faces || ends.some((end, f) => end !== 3 * f + 3)) throw fail('got polygons, expected triangles');
  const texts = decodeText(needed('CellData', 'patch', 'String'))
    .split('\0')
    .slice(0, -1);
  if (texts.length !== faces) throw fail(`patch: got ${texts.length} names, expected ${faces}`);
  if (indexOf(bytes, '</VTKFile>', bytes.length - 64) < 0) throw fail('the file is cut short: it has no end');
  const names: string[] = [];
  const number = new Map<string, number>();
  const solid = Int32Array.from(texts, (name) => {
    let at = number.get(name);
    if (at === undefined) {
      at = names.push(name) - 1;
      number.set(name, at);
    }
    return at;
  });
  const unit = block('FieldData', 'length_unit', 'String');
  return {
    corner: spread(points, corners, fail),
    solid,
    names,
    unit: unit === null ? null : decodeText(unit).replace(/\0.*$/, ''),
  };
}

/** Corner coordinates of triangles over shared points. */
export function spread(points: Float64Array, corners: Int32Array, fail: (message: string) => Error): Float64Array {
  const count = points.length / 3;
  const corner = new Float64Array(3 * corners.length);
  for (let c = 0; c < corners.length; c++) {
    const v = corners[c]!;
    if (!(v >= 0 && v < count)) throw fail(`triangle ${Math.floor(c / 3)}: got corner ${v}, expected below ${count}`);
    for (let k = 0; k < 3; k++) {
      const x = points[3 * v + k]!;
      if (!Number.isFinite(x)) throw fail(`point ${v}: got ${x}, expected a finite number`);
      corner[3 * c + k] = x;
    }
  }
  return corner;
}

/** The buffer of an array whose size must be whole tuples. */
function whole(data: Uint8Array, tuple: number, fail: (message: string) => Error): ArrayBuffer {
  if (data.length % tuple !== 0) throw fail(`got ${data.length} bytes, expected a multiple of ${tuple}`);
  return data.buffer as ArrayBuffer;
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
