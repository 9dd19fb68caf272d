import { InvariantError } from '../../core/errors.ts';
import { encodeText } from '../../core/text.ts';

/** Numbers as they stand in a file. */
export type Numbers = Float64Array | Float32Array | Int32Array | Uint8Array;

/** A named array of numbers or of texts. */
export type NamedArray =
  | {
      readonly name: string;
      /** All of it, or runs of one type that follow one another: what stands apart in memory need not be copied. */
      readonly values: Numbers | readonly Numbers[];
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
  readonly points: Numbers;
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
 * Cost: O(arrays); nothing is copied, so the parts must not change until the pieces are taken.
 */
export function encodeDataSet(kind: DataSetKind, parts: DataSetParts): EncodedDataSet {
  const cells = Object.entries(kind.cells);
  const points: NamedArray = { name: 'Points', values: parts.points, components: 3 };
  const arrays = [
    ...parts.fieldData,
    ...parts.pointData,
    ...parts.cellData,
    points,
    ...cells.flatMap(([, section]) => section),
  ];
  const blocks: { readonly length: number; readonly runs: readonly Uint8Array[] }[] = [];
  const offsets = new Map<NamedArray, number>();
  let size = 0;
  for (const array of arrays.toReversed()) {
    const runs = 'texts' in array ? [joinTexts(array.texts)] : runsOf(array.values).map(littleEndian);
    const length = runs.reduce((sum, run) => sum + run.length, 0);
    blocks.push({ length, runs });
    offsets.set(array, size);
    size += 8 + length;
  }
  const section = (tag: string, list: readonly NamedArray[], indent: string): string => {
    if (list.length === 0) return '';
    const lines = list.map((array) => `${indent}  ${declare(array, offsets.get(array)!)}\n`);
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
  const start = encodeText(head);
  const tail = encodeText('\n  </AppendedData>\n</VTKFile>\n');
  const pieces: Uint8Array[] = [start];
  for (const { length, runs } of blocks) {
    const header = new Uint8Array(8);
    new DataView(header.buffer).setBigUint64(0, BigInt(length), true);
    pieces.push(header, ...runs);
  }
  pieces.push(tail);
  return { size: start.length + size + tail.length, pieces };
}

/** A file piece by piece; its arrays are looked at where they stand. */
export interface EncodedDataSet {
  /** Bytes of the whole. */
  readonly size: number;
  readonly pieces: readonly Uint8Array[];
}

/** The whole file. Cost: O(bytes), one buffer of the final size. */
export function joinPieces({ size, pieces }: EncodedDataSet): Uint8Array {
  const bytes = new Uint8Array(size);
  let at = 0;
  for (const piece of pieces) {
    bytes.set(piece, at);
    at += piece.length;
  }
  return bytes;
}

/** The bytes of texts, each ended by a 0. */
export function joinTexts(texts: readonly string[]): Uint8Array {
  return encodeText(texts.map((text) => `${text.replaceAll('\u0000', '')}\u0000`).join(''));
}

function declare(array: NamedArray, offset: number): string {
  const text = 'texts' in array;
  const runs = text ? [] : runsOf(array.values);
  let attributes = `type="${text ? 'String' : typeOf(runs)}" Name="${escapeText(array.name)}"`;
  const components = text ? 1 : (array.components ?? 1);
  if (components > 1) attributes += ` NumberOfComponents="${components}"`;
  // Field arrays have no length but what they state; elsewhere the attribute does no harm.
  attributes += ` NumberOfTuples="${(text ? array.texts.length : runs.reduce((sum, run) => sum + run.length, 0)) / components}"`;
  return `<${text ? 'Array' : 'DataArray'} ${attributes} format="appended" offset="${offset}"/>`;
}

const IS_LITTLE = new Uint8Array(Uint32Array.of(1).buffer)[0] === 1;

/** The bytes of an array without a copy, which is what every machine that runs this has. */
function littleEndian(values: Numbers): Uint8Array {
  if (!IS_LITTLE) throw new InvariantError('encodeDataSet: this machine stores numbers with the high byte first');
  return new Uint8Array(values.buffer, values.byteOffset, values.byteLength);
}

function runsOf(values: Numbers | readonly Numbers[]): readonly Numbers[] {
  return ArrayBuffer.isView(values) ? [values] : values;
}

/** Type of the runs of an array, of which there is at least one. */
function typeOf(runs: readonly Numbers[]): string {
  for (const [type, name] of TYPES) if (runs[0] instanceof type) return name;
  throw new InvariantError('encodeDataSet: got an array of another type, or of no runs');
}

function escapeText(text: string): string {
  return text.replaceAll('&', '&amp;').replaceAll('<', '&lt;').replaceAll('>', '&gt;').replaceAll('"', '&quot;');
}
