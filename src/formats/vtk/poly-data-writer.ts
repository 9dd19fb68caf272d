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

export interface PolyDataParts {
  /** (3 points) */
  readonly points: Float64Array;
  readonly lines?: Cells;
  readonly polys?: Cells;
  readonly pointData: readonly NamedArray[];
  readonly cellData: readonly NamedArray[];
  readonly fieldData: readonly NamedArray[];
}

const TYPES = [
  [Float64Array, 'Float64'],
  [Float32Array, 'Float32'],
  [Int32Array, 'Int32'],
  [Uint8Array, 'UInt8'],
] as const;

/**
 * A VTK XML PolyData file: one piece, appended raw, little-endian, UInt64 headers.
 *
 * The same parts give the same bytes. Texts are UTF-8, each ended by a 0 byte.
 * Source: VTK XML formats as documented by Kitware.
 * Cost: O(bytes), one buffer of the final size.
 */
export function encodePolyData(parts: PolyDataParts): Uint8Array {
  const blocks: Uint8Array[] = [];
  let offset = 0;
  const declare = (array: NamedArray, indent: string): string => {
    const text = 'texts' in array;
    const data = text ? joinTexts(array.texts) : littleEndian(array.values);
    let attributes = `type="${text ? 'String' : typeOf(array.values)}" Name="${escapeText(array.name)}"`;
    const components = text ? 1 : (array.components ?? 1);
    if (components > 1) attributes += ` NumberOfComponents="${components}"`;
    // Field arrays have no length but what they state; elsewhere the attribute does no harm.
    attributes += ` NumberOfTuples="${(text ? array.texts.length : array.values.length) / components}"`;
    const tag = text ? 'Array' : 'DataArray';
    const line = `${indent}<${tag} ${attributes} format="appended" offset="${offset}"/>\n`;
    blocks.push(data);
    offset += 8 + data.length;
    return line;
  };
  const section = (tag: string, arrays: readonly NamedArray[], indent: string): string =>
    arrays.length === 0
      ? ''
      : `${indent}<${tag}>\n${arrays.map((array) => declare(array, `${indent}  `)).join('')}${indent}</${tag}>\n`;
  const cells = (tag: string, list: Cells | undefined): string =>
    list === undefined
      ? ''
      : section(
          tag,
          [
            { name: 'connectivity', values: list.connectivity },
            { name: 'offsets', values: list.ends },
          ],
          '      ',
        );
  const head =
    '<?xml version="1.0"?>\n' +
    '<VTKFile type="PolyData" version="1.0" byte_order="LittleEndian" header_type="UInt64">\n' +
    '  <PolyData>\n' +
    section('FieldData', parts.fieldData, '    ') +
    `    <Piece NumberOfPoints="${parts.points.length / 3}" NumberOfVerts="0"` +
    ` NumberOfLines="${parts.lines?.ends.length ?? 0}" NumberOfStrips="0"` +
    ` NumberOfPolys="${parts.polys?.ends.length ?? 0}">\n` +
    section('PointData', parts.pointData, '      ') +
    section('CellData', parts.cellData, '      ') +
    section('Points', [{ name: 'Points', values: parts.points, components: 3 }], '      ') +
    cells('Lines', parts.lines) +
    cells('Polys', parts.polys) +
    '    </Piece>\n  </PolyData>\n  <AppendedData encoding="raw">\n   _';
  const tail = encodeText('\n  </AppendedData>\n</VTKFile>\n');
  const start = encodeText(head);
  const bytes = new Uint8Array(start.length + offset + tail.length);
  const view = new DataView(bytes.buffer);
  bytes.set(start);
  let at = start.length;
  for (const block of blocks) {
    view.setBigUint64(at, BigInt(block.length), true);
    bytes.set(block, at + 8);
    at += 8 + block.length;
  }
  bytes.set(tail, at);
  return bytes;
}

const IS_LITTLE = new Uint8Array(Uint32Array.of(1).buffer)[0] === 1;

/** The bytes of an array without a copy, which is what every machine that runs this has. */
function littleEndian(values: Float64Array | Float32Array | Int32Array | Uint8Array): Uint8Array {
  if (!IS_LITTLE) throw new InvariantError('encodePolyData: this machine stores numbers with the high byte first');
  return new Uint8Array(values.buffer, values.byteOffset, values.byteLength);
}

function typeOf(values: Float64Array | Float32Array | Int32Array | Uint8Array): string {
  for (const [type, name] of TYPES) if (values instanceof type) return name;
  throw new InvariantError('encodePolyData: got an array of another type');
}

function joinTexts(texts: readonly string[]): Uint8Array {
  return encodeText(texts.map((text) => `${text.replaceAll('\u0000', '')}\u0000`).join(''));
}

function escapeText(text: string): string {
  return text.replaceAll('&', '&amp;').replaceAll('<', '&lt;').replaceAll('>', '&gt;').replaceAll('"', '&quot;');
}
