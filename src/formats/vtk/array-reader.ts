import { decodeText } from '../../core/text.ts';
import type { FaultList } from '../faults.ts';
import type { ByteSource } from '../format.ts';
import { parseReal } from '../text/numbers.ts';
import { type BlockCoding, type Fail, type Pool, poolOf, readBase64Block, readBlock } from './blocks.ts';
import { type Element, scanXml } from './xml.ts';

const SIZES: Readonly<Record<string, number>> = {
  Int8: 1,
  UInt8: 1,
  Int16: 2,
  UInt16: 2,
  Int32: 4,
  UInt32: 4,
  Int64: 8,
  UInt64: 8,
  Float32: 4,
  Float64: 8,
};

const ZLIB = 'vtkZLibDataCompressor';

/** A VTK XML file of which arrays are read one by one when they are asked for. */
export interface VtkFile {
  readonly name: string;
  readonly root: Element;
  /** `PolyData`, `UnstructuredGrid`, … */
  readonly type: string;
  /** Numbers of an array, all as float64; null after a fault. */
  numbers(array: Element): Float64Array | null;
  /** The same, but Int32 stays Int32: half the memory where whole numbers are expected. */
  indices(array: Element): Float64Array | Int32Array | null;
  /** Texts of an array of type String, or of their codes as Int8 or UInt8; null after a fault. */
  texts(array: Element): string[] | null;
}

/**
 * Opens a VTK XML file: raw or base64 appended data, inline base64 and inline numbers, either byte order, either header
 * size, plain or packed by zlib.
 *
 * @returns null after a fault
 * Source: VTK XML formats as documented by Kitware; offsets count from the byte after `_`.
 */
export function openVtk(content: Uint8Array | ByteSource, name: string, faults: FaultList): VtkFile | null {
  const bytes = content instanceof Uint8Array ? content : readText(content);
  const root = scanXml(bytes, name, faults);
  if (root === null) return null;
  const attributes = root.attributes;
  if (root.name !== 'VTKFile') {
    faults.add('not-vtk', name, `got <${root.name}>, expected <VTKFile>`);
    return null;
  }
  const packer = attributes.compressor ?? '';
  if (packer !== '' && packer !== ZLIB) {
    faults.add('compressed', name, `got data packed by ${packer}, expected ${ZLIB} or a file written uncompressed`);
  }
  const order = attributes.byte_order ?? 'LittleEndian';
  if (order !== 'LittleEndian' && order !== 'BigEndian') {
    faults.add('byte-order', name, `got byte_order ${order}, expected LittleEndian or BigEndian`);
  }
  const header = attributes.header_type ?? 'UInt32';
  if (header !== 'UInt32' && header !== 'UInt64') {
    faults.add('header-type', name, `got header_type ${header}, expected UInt32 or UInt64`);
  }
  const appended = root.children.find((child) => child.name === 'AppendedData');
  let pool: Pool | null = null;
  if (appended !== undefined) {
    const encoding = appended.attributes.encoding ?? 'base64';
    const mark = bytes.indexOf(0x5f, appended.from);
    if (mark < 0) faults.add('appended', name, 'got appended data without the mark _ before it');
    else if (encoding === 'raw') pool = poolOf(content, mark + 1);
    else if (encoding === 'base64') {
      const end = bytes.indexOf(0x3c, mark);
      pool = poolOf(bytes.subarray(0, end < 0 ? bytes.length : end), mark + 1);
    } else faults.add('appended', name, `got appended data encoded as ${encoding}, expected raw or base64`);
  }
  if (faults.count > 0) return null;

  const big = order === 'BigEndian';
  const coding: BlockCoding = { big, headerSize: header === 'UInt64' ? 8 : 4, packed: packer === ZLIB };
  const base64 = appended?.attributes.encoding !== 'raw';

  const place = (array: Element): string => `${name} ${array.attributes.Name ?? array.name}`;
  const fault = (array: Element, code: string, message: string): null => {
    faults.add(code, place(array), message);
    return null;
  };
  const block = (array: Element): Uint8Array | null => {
    const fail: Fail = (code, message) => fault(array, code, message);
    if (array.attributes.format !== 'appended') {
      return readBase64Block(bytes.subarray(array.from, array.to), false, coding, fail);
    }
    const offset = parseReal(array.attributes.offset ?? '');
    if (pool === null) return fail('appended', 'is said to be in the appended data, of which there is none');
    if (!(Number.isInteger(offset) && offset >= 0)) {
      return fail('offset', `got offset "${array.attributes.offset}", expected a whole number`);
    }
    if (!base64) return readBlock(pool, offset, coding, fail);
    if (offset > pool.length) return fail('truncated', `starts at byte ${offset} of ${pool.length}`);
    return readBase64Block(pool.take(offset, pool.length - offset), true, coding, fail);
  };
  const isText = (array: Element): boolean => (array.attributes.format ?? 'ascii') === 'ascii';
  const indices = (array: Element): Float64Array | Int32Array | null => {
    const type = array.attributes.type ?? '';
    if (isText(array)) return parseNumbers(array, bytes.subarray(array.from, array.to), fault);
    const size = SIZES[type];
    if (size === undefined)
      return fault(array, 'type', `got type ${type}, expected one of ${Object.keys(SIZES).join(', ')}`);
    const data = block(array);
    if (data === null) return null;
    if (data.length % size !== 0)
      return fault(array, 'length', `got ${data.length} bytes, expected a multiple of ${size}`);
    // A copy puts the bytes where a typed array may look at them, and in this machine’s order; slice() of a Node Buffer is
    // none. Bytes that fill a buffer were read for this array alone: in a file its length stands before them.
    const alone = data.byteOffset === 0 && data.length === data.buffer.byteLength;
    const own = alone ? (data as Uint8Array<ArrayBuffer>) : new Uint8Array(data);
    if (big !== IS_BIG) swapBytes(own, size);
    return type === 'Int32' ? new Int32Array(own.buffer) : widen(type, own.buffer);
  };
  const numbers = (array: Element): Float64Array | null => {
    const values = indices(array);
    return values instanceof Int32Array ? new Float64Array(values) : values;
  };
  const texts = (array: Element): string[] | null => {
    let data: Uint8Array | null;
    if (isText(array)) {
      // Numbers are the bytes of the texts, each text ended by a 0.
      const codes = parseNumbers(array, bytes.subarray(array.from, array.to), fault);
      data = codes === null ? null : Uint8Array.from(codes);
    } else data = block(array);
    if (data === null) return null;
    const list: string[] = [];
    for (let from = 0; from < data.length; ) {
      const end = data.indexOf(0, from);
      list.push(decodeText(data.subarray(from, end < 0 ? data.length : end)));
      from = end < 0 ? data.length : end + 1;
    }
    return list;
  };
  return { name, root, type: attributes.type ?? '', numbers, indices, texts };
}

/** Most bytes of a file's start that are looked through for the mark of raw data. */
const HEAD = 1 << 20;

/** What stands before the raw data of a file, and a little of that; the whole file where its data is text. */
function readText(source: ByteSource): Uint8Array {
  const head = new Uint8Array(Math.min(source.size, HEAD));
  source.readInto(0, head);
  if (/<AppendedData[^>]*encoding\s*=\s*["']raw["'][^>]*>\s*_/.test(decodeText(head))) return head;
  const whole = new Uint8Array(source.size);
  source.readInto(0, whole);
  return whole;
}

const IS_BIG = new Uint8Array(Uint32Array.of(1).buffer)[0] === 0;

function swapBytes(bytes: Uint8Array, size: number): void {
  if (size === 1) return;
  for (let at = 0; at < bytes.length; at += size) bytes.subarray(at, at + size).reverse();
}

function widen(type: string, buffer: ArrayBuffer): Float64Array {
  switch (type) {
    case 'Float64':
      return new Float64Array(buffer);
    case 'Float32':
      return new Float64Array(new Float32Array(buffer));
    case 'Int8':
      return new Float64Array(new Int8Array(buffer));
    case 'UInt8':
      return new Float64Array(new Uint8Array(buffer));
    case 'Int16':
      return new Float64Array(new Int16Array(buffer));
    case 'UInt16':
      return new Float64Array(new Uint16Array(buffer));
    case 'UInt32':
      return new Float64Array(new Uint32Array(buffer));
    default: {
      // Int64 and UInt64 by halves, four times as fast as by BigInt; exact to 2⁵³, and no index is larger.
      const low = new Uint32Array(buffer);
      const out = new Float64Array(low.length / 2);
      const [l, h] = IS_BIG ? [1, 0] : [0, 1];
      for (let i = 0; i < out.length; i++) {
        const high = low[2 * i + h]!;
        out[i] = (type === 'Int64' ? high | 0 : high) * 4294967296 + low[2 * i + l]!;
      }
      return out;
    }
  }
}

function parseNumbers(
  array: Element,
  bytes: Uint8Array,
  fault: (array: Element, code: string, message: string) => null,
): Float64Array | null {
  let out = new Float64Array(64);
  let size = 0;
  let from = -1;
  for (let at = 0; at <= bytes.length; at++) {
    const space = at === bytes.length || bytes[at]! <= 0x20;
    if (!space) {
      if (from < 0) from = at;
      continue;
    }
    if (from < 0) continue;
    const word = decodeText(bytes.subarray(from, Math.min(at, from + 64)));
    from = -1;
    const value = parseReal(word);
    if (Number.isNaN(value) && word.toLowerCase() !== 'nan') {
      return fault(array, 'number', `got "${word}" at position ${size}, expected a number`);
    }
    if (size === out.length) {
      const grown = new Float64Array(2 * size);
      grown.set(out);
      out = grown;
    }
    out[size++] = value;
  }
  return out.slice(0, size);
}
