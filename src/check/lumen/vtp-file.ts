import { decodeText } from '../../core/text.ts';
import { openAppended } from './appended-file.ts';
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
  const { fail, block, needed } = openAppended(file, bytes, 'PolyData');
  const points = new Float64Array(needed('Points', 'Points', 'Float64', 24));
  const corners = new Int32Array(needed('Polys', 'connectivity', 'Int32', 12));
  const ends = new Int32Array(needed('Polys', 'offsets', 'Int32', 4));
  const faces = corners.length / 3;
  if (ends.length !== faces || ends.some((end, f) => end !== 3 * f + 3)) throw fail('got polygons, expected triangles');
  const texts = decodeText(new Uint8Array(needed('CellData', 'patch', 'String', 1)))
    .split('\0')
    .slice(0, -1);
  if (texts.length !== faces) throw fail(`patch: got ${texts.length} names, expected ${faces}`);
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
