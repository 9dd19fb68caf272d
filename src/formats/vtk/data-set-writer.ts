import { InvariantError } from '../../core/errors.ts';
import { encodeText } from '../../core/text.ts';

/** A named array of numbers or of texts. */
export type NamedArray =
  | {
      readonly name: string;
      readonly values: Float64Array | Float32Array | Int32Array | Uint8Array;
      /** Numbers a tuple; 1 where left out. */
      readonly components?: number;
    }
  | { readonly name: string; readonly texts: readonly string[] };

/** Cells: point indices one cell after another, and one past the last index of each. */
export interface Cells {
  readonly connectivity: Int32Array;
  readonly ends: Int32Array;
}

/** What every kind of data set has. */
export interface DataSetParts {
  /** (3 points) */
  readonly points: Float64Array;
  readonly pointData: readonly NamedArray[];
  readonly cellData: readonly NamedArray[];
  readonly fieldData: readonly NamedArray[];
}

/** What one kind of data set has of its own. */
export interface DataSetKind {
  readonly type: 'PolyData' | 'UnstructuredGrid';
  /** Attributes of the piece after its number of points. */
  readonly counts: Readonly<Record<string, number>>;
  /** Sections of cells, in order. */
  readonly cells: Readonly<Record<string, readonly NamedArray[]>>;
}

const TYPES = [
  [Float64Array, 'Float64'],
  [Float32Array, 'Float32'],
  [Int32Array, 'Int32'],
  [Uint8Array, 'UInt8'],
] as const;

/**
 * A VTK XML file: one piece, appended raw, little-endian, UInt64 headers.
 *
 * The same parts give the same bytes. Texts are UTF-8, each ended by a 0 byte.
 *
 * Data stands in the order opposite to that of its declarations. One reader (meshio 5) moves arrays one after another,
 * to offsets a third larger, and finds the next by the first declaration with its offset: had the arrays moved before it
 * been declared before it, one of them might have come to stand there. In the other order, one tree of 20 vessels named
 * by 13 letters was enough for it to mistake arrays.
 *
 * Source: VTK XML formats as documented by Kitware.
 * Cost: O(bytes), one buffer of the final size.
 */
export function encodeDataSet(kind: DataSetKind, parts: DataSetParts): Uint8Array {
  const cells = Object.entries(kind.cells);
  const points: NamedArray = { name: 'Points', values: parts.points, components: 3 };
  const arrays = [
    ...parts.fieldData,
    ...parts.pointData,
    ...parts.cellData,
    points,
    ...cells.flatMap(([, section]) => section),
  ];
  const blocks = new Map<NamedArray, { readonly data: Uint8Array; readonly offset: number }>();
  let size = 0;
  for (const array of arrays.toReversed()) {
    const data = 'texts' in array ? joinTexts(array.texts) : littleEndian(array.values);
    blocks.set(array, { data, offset: size });
    size += 8 + data.length;
  }
  const section = (tag: string, list: readonly NamedArray[], indent: string): string => {
    if (list.length === 0) return '';
    const lines = list.map((array) => `${indent}  ${declare(array, blocks.get(array)!.offset)}\n`);
    return `${indent}<${tag}>\n${lines.join('')}${indent}</${tag}>\n`;
  };
  const counts = Object.entries({ NumberOfPoints: parts.points.length / 3, ...kind.counts });
  const head =
    '<?xml version="1.0"?>\n' +
    `<VTKFile type="${kind.type}" version="1.0" byte_order="LittleEndian" header_type="UInt64">\n` +
    `  <${kind.type}>\n` +
    section('FieldData', parts.fieldData, '    ') +
    `    <Piece ${counts.map(([name, count]) => `${name}="${count}"`).join(' ')}>\n` +
    section('PointData', parts.pointData, '      ') +
    section('CellData', parts.cellData, '      ') +
    section('Points', [points], '      ') +
    cells.map(([tag, list]) => section(tag, list, '      ')).join('') +
    `    </Piece>\n  </${kind.type}>\n  <AppendedData encoding="raw">\n   _`;
  const tail = encodeText('\n  </AppendedData>\n</VTKFile>\n');
  const start = encodeText(head);
  const bytes = new Uint8Array(start.length + size + tail.length);
  const view = new DataView(bytes.buffer);
  bytes.set(start);
  for (const { data, offset } of blocks.values()) {
    view.setBigUint64(start.length + offset, BigInt(data.length), true);
    bytes.set(data, start.length + offset + 8);
  }
  bytes.set(tail, start.length + size);
  return bytes;
}

/** The bytes of texts, each ended by a 0. */
export function joinTexts(texts: readonly string[]): Uint8Array {
  return encodeText(texts.map((text) => `${text.replaceAll('\u0000', '')}\u0000`).join(''));
}

function declare(array: NamedArray, offset: number): string {
  const text = 'texts' in array;
  let attributes = `type="${text ? 'String' : typeOf(array.values)}" Name="${escapeText(array.name)}"`;
  const components = text ? 1 : (array.components ?? 1);
  if (components > 1) attributes += ` NumberOfComponents="${components}"`;
  // Field arrays have no length but what they state; elsewhere the attribute does no harm.
  attributes += ` NumberOfTuples="${(text ? array.texts.length : array.values.length) / components}"`;
  return `<${text ? 'Array' : 'DataArray'} ${attributes} format="appended" offset="${offset}"/>`;
}

const IS_LITTLE = new Uint8Array(Uint32Array.of(1).buffer)[0] === 1;

/** The bytes of an array without a copy, which is what every machine that runs this has. */
function littleEndian(values: Float64Array | Float32Array | Int32Array | Uint8Array): Uint8Array {
  if (!IS_LITTLE) throw new InvariantError('encodeDataSet: this machine stores numbers with the high byte first');
  return new Uint8Array(values.buffer, values.byteOffset, values.byteLength);
}

function typeOf(values: Float64Array | Float32Array | Int32Array | Uint8Array): string {
  for (const [type, name] of TYPES) if (values instanceof type) return name;
  throw new InvariantError('encodeDataSet: got an array of another type');
}

function escapeText(text: string): string {
  return text.replaceAll('&', '&amp;').replaceAll('<', '&lt;').replaceAll('>', '&gt;').replaceAll('"', '&quot;');
}
