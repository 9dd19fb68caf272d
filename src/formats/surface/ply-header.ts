import { quoted, type TextReader } from './text-reader.ts';

/** Bytes of each scalar type, by both of its names. */
const BYTES = {
  char: 1,
  int8: 1,
  uchar: 1,
  uint8: 1,
  short: 2,
  int16: 2,
  ushort: 2,
  uint16: 2,
  int: 4,
  int32: 4,
  uint: 4,
  uint32: 4,
  float: 4,
  float32: 4,
  double: 8,
  float64: 8,
} as const;

export type PlyType = keyof typeof BYTES;

export interface PlyProperty {
  readonly name: string;
  readonly type: PlyType;
  /** Type of the count of a list, or null for a single value. */
  readonly listCount: PlyType | null;
}

export interface PlyElement {
  readonly name: string;
  readonly count: number;
  readonly properties: PlyProperty[];
}

export interface PlyHeader {
  readonly encoding: 'ascii' | 'binary_little_endian' | 'binary_big_endian';
  readonly elements: PlyElement[];
}

export function typeBytes(type: PlyType): number {
  return BYTES[type];
}

/** Reads up to and with the line `end_header`. */
export function readPlyHeader(reader: TextReader): PlyHeader {
  const elements: PlyElement[] = [];
  let encoding: PlyHeader['encoding'] | null = null;
  if (reader.wordOfLine() !== 'ply') throw reader.fault('bad-syntax', 'got no "ply" at the start, expected PLY');
  reader.skipLine();
  for (;;) {
    if (reader.ended) throw reader.fault('truncated', 'got the end of a truncated file, expected "end_header"');
    const word = reader.wordOfLine();
    if (word === 'format') {
      const name = reader.wordOfLine();
      if (name !== 'ascii' && name !== 'binary_little_endian' && name !== 'binary_big_endian')
        throw reader.fault(
          'bad-syntax',
          `got format ${quoted(name)}, expected ascii, binary_little_endian or binary_big_endian`,
        );
      encoding = name;
    } else if (word === 'element') {
      const name = reader.wordOfLine();
      const count = reader.integer(reader.wordOfLine(), `the count of element ${quoted(name)}`);
      if (count < 0) throw reader.fault('wrong-count', `got ${count} of element ${quoted(name)}, expected ≥ 0`);
      elements.push({ name, count, properties: [] });
    } else if (word === 'property') {
      const element = elements.at(-1);
      if (element === undefined)
        throw reader.fault('bad-syntax', 'got a property before any element, expected "element"');
      element.properties.push(readProperty(reader));
    } else if (word === 'end_header') break;
    else if (word !== 'comment' && word !== 'obj_info' && word !== '')
      throw reader.fault('bad-syntax', `got ${quoted(word)}, expected a PLY header line`);
    reader.skipLine();
  }
  if (encoding === null) throw reader.fault('bad-syntax', 'got no "format" line, expected one');
  for (const { name, count, properties } of elements)
    if (properties.length === 0 && count > 0)
      throw reader.fault('bad-syntax', `got element ${quoted(name)} without properties, expected some`);
  reader.skipLine();
  return { encoding, elements };
}

function readProperty(reader: TextReader): PlyProperty {
  const readType = (): PlyType => {
    const word = reader.wordOfLine();
    if (!Object.hasOwn(BYTES, word)) throw reader.fault('bad-syntax', `got type ${quoted(word)}, expected a PLY type`);
    return word as PlyType;
  };
  const first = reader.wordOfLine();
  if (first !== 'list') {
    if (!Object.hasOwn(BYTES, first))
      throw reader.fault('bad-syntax', `got type ${quoted(first)}, expected a PLY type`);
    return { name: reader.wordOfLine(), type: first as PlyType, listCount: null };
  }
  const listCount = readType();
  if (/float|double/.test(listCount))
    throw reader.fault('bad-syntax', `got a list counted in ${listCount}, expected a whole type`);
  const type = readType();
  return { name: reader.wordOfLine(), type, listCount };
}
