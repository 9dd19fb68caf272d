import { type InputError, inputError } from '../../core/errors.ts';
import type { TriangleSurface } from '../../core/surface.ts';
import { mergeCorners } from './corners.ts';
import {
  type PlyElement,
  type PlyHeader,
  type PlyProperty,
  type PlyType,
  readPlyHeader,
  typeBytes,
} from './ply-header.ts';
import { PolygonFans } from './polygons.ts';
import { TextReader } from './text-reader.ts';

/** Where values come from: the next one of a type, and faults that name the place. */
interface Source {
  next(type: PlyType, what: string): number;
  /** Passes over a value without judging it. */
  pass(type: PlyType): void;
  fault(code: string, message: string): InputError;
  /** Bytes still to come. */
  left(): number;
  /** Least bytes that one value takes. */
  least(type: PlyType): number;
}

/**
 * Reads PLY, ASCII or binary of either byte order. Elements other than `vertex` and `face` and properties other than
 * x, y, z and the corner list are passed over. Polygons are split in fans.
 *
 * @param file named in messages
 * @returns    coordinates in the file's own unit
 * @throws  InputError naming the line or the byte: truncated, count larger than the file, not finite, row out of range
 */
export function decodePly(bytes: Uint8Array, file: string): TriangleSurface {
  if (bytes.length === 0) throw inputError('empty-surface', file, 'got an empty file, expected PLY');
  const reader = new TextReader(bytes, file);
  const header = readPlyHeader(reader);
  if (!header.elements.some(({ name }) => name === 'vertex'))
    throw reader.fault('bad-syntax', 'got no element "vertex", expected one');
  const source = header.encoding === 'ascii' ? textSource(reader) : binarySource(reader, header);
  let corner: Float64Array = new Float64Array(0);
  const fans = new PolygonFans();
  for (const element of header.elements) {
    const least = element.properties.reduce((sum, { type, listCount }) => sum + source.least(listCount ?? type), 0);
    // Before anything is allocated: a claimed count must fit in what is left (text may lack its last line end).
    if (element.count * least > source.left() + 1)
      throw source.fault(
        'truncated',
        `got a truncated file: ${source.left()} bytes left, expected ${element.count} of element "${element.name}"`,
      );
    if (element.name === 'vertex') corner = readCorners(source, element);
    else if (element.name === 'face') readFaces(source, element, fans, header);
    else if (element.name === 'tristrips') throw source.fault('not-supported', 'got triangle strips, expected faces');
    else for (let i = 0; i < element.count; i++) for (const property of element.properties) skip(source, property);
  }
  if (fans.triangle.length === 0)
    throw inputError('empty-surface', file, 'got an empty surface without faces, expected some');
  return mergeCorners(corner, fans.triangle);
}

function readCorners(source: Source, element: PlyElement): Float64Array {
  const { count, properties } = element;
  const axis = properties.map(({ name, listCount }) => (listCount === null ? ['x', 'y', 'z'].indexOf(name) : -1));
  for (const [i, name] of ['x', 'y', 'z'].entries())
    if (axis.filter((a) => a === i).length !== 1)
      throw source.fault('bad-syntax', `got element "vertex" without one property "${name}", expected x, y, z`);
  const corner = new Float64Array(3 * count);
  for (let row = 0; row < count; row++) {
    for (let p = 0; p < properties.length; p++) {
      if (axis[p] === -1) {
        skip(source, properties[p]!);
        continue;
      }
      const { type, name } = properties[p]!;
      const value = source.next(type, name);
      if (!Number.isFinite(value))
        throw source.fault('non-finite', `got ${value} for ${name} of vertex ${row}, expected a finite number`);
      corner[3 * row + axis[p]!] = value;
    }
  }
  return corner;
}

function readFaces(source: Source, element: PlyElement, fans: PolygonFans, header: PlyHeader): void {
  const { count, properties } = element;
  const list = properties.findIndex(
    ({ name, listCount }) => listCount !== null && (name === 'vertex_indices' || name === 'vertex_index'),
  );
  if (list < 0) throw source.fault('bad-syntax', 'got element "face" without a list "vertex_indices", expected one');
  const corners = header.elements.find(({ name }) => name === 'vertex')?.count ?? 0;
  for (let face = 0; face < count; face++) {
    for (let p = 0; p < properties.length; p++) {
      const property = properties[p]!;
      if (p !== list) {
        skip(source, property);
        continue;
      }
      const length = listLength(source, property);
      for (let i = 0; i < length; i++) {
        const row = source.next(property.type, 'a corner');
        if (!(Number.isInteger(row) && row >= 0 && row < corners))
          throw source.fault('bad-index', `got corner ${row} in face ${face}, expected 0 to ${corners - 1}`);
        fans.corner(row);
      }
      fans.close();
      if (length < 3) throw source.fault('bad-face', `got face ${face} of ${length} corners, expected at least 3`);
    }
  }
}

function skip(source: Source, property: PlyProperty): void {
  const values = property.listCount === null ? 1 : listLength(source, property);
  for (let i = 0; i < values; i++) source.pass(property.type);
}

function listLength(source: Source, { type, listCount, name }: PlyProperty): number {
  const length = source.next(listCount!, `the length of ${name}`);
  if (!(Number.isInteger(length) && length >= 0))
    throw source.fault('wrong-count', `got a list of ${length} for ${name}, expected a length ≥ 0`);
  if (length * source.least(type) > source.left() + 1)
    throw source.fault(
      'truncated',
      `got a truncated file: ${source.left()} bytes left, expected a list of ${length} for ${name}`,
    );
  return length;
}

function textSource(reader: TextReader): Source {
  return {
    next: (type, what) => {
      const word = reader.word();
      return /float|double/.test(type) ? reader.real(word, what) : reader.integer(word, what);
    },
    pass: () => void reader.word(),
    fault: (code, message) => reader.fault(code, message),
    left: () => reader.bytes.length - reader.at,
    least: () => 2,
  };
}

function binarySource(reader: TextReader, header: PlyHeader): Source {
  const { bytes, file } = reader;
  const view = new DataView(bytes.buffer, bytes.byteOffset, bytes.byteLength);
  const little = header.encoding === 'binary_little_endian';
  let at = reader.at;
  const fault = (code: string, message: string): InputError => inputError(code, file, `at byte ${at}: ${message}`);
  return {
    next: (type, what) => {
      const size = typeBytes(type);
      if (at + size > bytes.length) throw fault('truncated', `got the end of a truncated file, expected ${what}`);
      const value = readScalar(view, at, type, little);
      at += size;
      return value;
    },
    pass: (type) => {
      at += typeBytes(type);
    },
    fault,
    left: () => bytes.length - at,
    least: typeBytes,
  };
}

function readScalar(view: DataView, at: number, type: PlyType, little: boolean): number {
  switch (type) {
    case 'char':
    case 'int8':
      return view.getInt8(at);
    case 'uchar':
    case 'uint8':
      return view.getUint8(at);
    case 'short':
    case 'int16':
      return view.getInt16(at, little);
    case 'ushort':
    case 'uint16':
      return view.getUint16(at, little);
    case 'int':
    case 'int32':
      return view.getInt32(at, little);
    case 'uint':
    case 'uint32':
      return view.getUint32(at, little);
    case 'float':
    case 'float32':
      return view.getFloat32(at, little);
    case 'double':
    case 'float64':
      return view.getFloat64(at, little);
  }
}
