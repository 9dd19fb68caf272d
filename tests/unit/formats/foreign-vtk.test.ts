import { readdirSync, readFileSync } from 'node:fs';
import { deflateSync } from 'node:zlib';
import { describe, expect, it } from 'vitest';
import { InputError } from '../../../src/core/errors.ts';
import { splitTreePath } from '../../../src/formats/tree-formats.ts';

// Source: files written by VTK 9.1's own writers (see make-vtp.py beside them), rows in a scrambled order.
const FOLDER = new URL('../../fixtures/trees/', import.meta.url);
const bytesOf = (name: string) => new Uint8Array(readFileSync(new URL(name, FOLDER)));
const decode = (name: string, bytes: Uint8Array) => splitTreePath(name, name).format.decode([{ name, bytes }]);
const read = (name: string) => decode(name, bytesOf(name));

const POSITION = [0, 0, 0, 1e-3, 0, 1e-4, 3e-3, 1e-3 / 3, 0, 3e-3, -1e-3 / 7, 2e-4];
const KINDS = (name: string) => `${name}: does not say which trees drain; all were taken as supply`;
const GRIDS = ['grid.vtu', 'grid-compressed.vtu'];
const EXACT = [
  'ascii.vtp',
  'inline-base64.vtp',
  'appended-raw.vtp',
  'appended-base64-uint64.vtp',
  'big-endian-raw-int32.vtp',
  'big-endian-inline-uint64.vtp',
  'compressed.vtp',
  'compressed-blocks.vtp',
  'compressed-blocks-raw.vtp',
  'compressed-blocks-inline.vtp',
  ...GRIDS,
];

describe('decoding VTK files of another writer', () => {
  it('covers every file there is', () => {
    const files = readdirSync(FOLDER).filter((name) => /\.vt[pu]$/.test(name));
    expect(files.sort()).toEqual([...EXACT, 'float32-verts.vtp', 'polyline.vtp'].sort());
  });

  for (const name of EXACT) {
    it(`reads ${name} to the last bit`, () => {
      const { record, notes } = read(name);
      const { forest } = record;
      expect(Array.from(forest.parent)).toEqual([-1, 0, 1, 1]);
      expect(Array.from(forest.position)).toEqual(POSITION);
      expect(Array.from(forest.radius)).toEqual([2e-4, 2e-4, 1.5e-4, 1e-4]);
      expect(Array.from(forest.flow)).toEqual([4e-9, 4e-9, 3e-9, 1e-9]);
      expect(Array.from(record.order)).toEqual([2, 2, 1, 1]);
      expect(record.kinds).toEqual(['supply']);
      expect(record.names).toEqual(['tree_0']);
      expect(record.field).toBeNull();
      expect(record.provenance).toBeNull();
      const others = GRIDS.includes(name) ? [`${name}: left out cells that are no lines: 1 of 4`] : [];
      expect(notes).toEqual([...others, KINDS(name)]);
    });
  }

  it('passes over the values of cells before the lines, and widens float32', () => {
    const { record, notes } = read('float32-verts.vtp');
    expect(Array.from(record.forest.radius)).toEqual([2e-4, 2e-4, 1.5e-4, 1e-4].map(Math.fround));
    expect(Array.from(record.forest.position)).toEqual(POSITION.map(Math.fround));
    expect(notes[0]).toBe('float32-verts.vtp: left out cells that are no lines: 1 of 4');
  });

  it('cuts lines of several points into vessels and supplies flow', () => {
    const { record, notes } = read('polyline.vtp');
    expect(Array.from(record.forest.radius)).toEqual([2e-4, 2e-4, 2e-4, 1e-4]);
    expect(Array.from(record.forest.flow)).toEqual([2, 2, 1, 1]);
    expect(notes[0]).toMatch(/holds no flow/);
  });

  it('tells the two kinds of data set apart by what they hold, not by the name of the file', () => {
    expect(() => decode('tree.vtu', bytesOf('ascii.vtp'))).toThrow(/type PolyData, expected UnstructuredGrid/);
    expect(() => decode('tree.vtp', bytesOf('grid.vtu'))).toThrow(/type UnstructuredGrid, expected PolyData/);
  });
});

/** A copy with every place of a text replaced. */
function swap(bytes: Uint8Array, from: string, to: string): Uint8Array {
  const text = Buffer.from(bytes).toString('latin1');
  expect(text).toContain(from);
  return new Uint8Array(Buffer.from(text.replaceAll(from, to), 'latin1'));
}

/** A VTK file of one vessel, 3 mm along x, whose points are the packed bytes given; headers little-endian UInt32. */
function vesselWithPoints(header: readonly number[], packed: Uint8Array): Uint8Array {
  const points = Buffer.concat([Buffer.from(Uint32Array.from(header).buffer), packed]);
  const array = (name: string, type: string, numbers: string) =>
    `<DataArray type="${type}" Name="${name}" format="ascii">${numbers}</DataArray>`;
  const head =
    '<VTKFile type="PolyData" byte_order="LittleEndian" header_type="UInt32" compressor="vtkZLibDataCompressor">' +
    '<PolyData><Piece NumberOfPoints="2" NumberOfLines="1">' +
    `<CellData>${array('radius_m', 'Float64', '1e-3')}</CellData>` +
    '<Points><DataArray type="Float64" NumberOfComponents="3" format="appended" offset="0"/></Points>' +
    `<Lines>${array('connectivity', 'Int32', '0 1')}${array('offsets', 'Int32', '2')}</Lines>` +
    '</Piece></PolyData><AppendedData encoding="raw">_';
  return new Uint8Array(Buffer.concat([Buffer.from(head), points, Buffer.from('</AppendedData></VTKFile>')]));
}

describe('decoding packed VTK files', () => {
  const places = new Uint8Array(Float64Array.of(0, 0, 0, 3e-3, 0, 0).buffer);
  const packed = new Uint8Array(deflateSync(places));
  const tree = (header: readonly number[], data: Uint8Array = packed) =>
    decode('tree.vtp', vesselWithPoints(header, data)).record;

  it('unpacks blocks whole, in part and none', () => {
    // Header: blocks, bytes of a block, bytes of the last or 0 for a whole one, packed bytes of each.
    expect(Array.from(tree([1, 48, 0, packed.length]).forest.position)).toEqual([0, 0, 0, 3e-3, 0, 0]);
    expect(Array.from(tree([1, 32768, 48, packed.length]).forest.position)).toEqual([0, 0, 0, 3e-3, 0, 0]);
    expect(() => tree([0, 48, 0])).toThrow(/Points: got 0 numbers, expected 6/);
    expect(() => tree([0])).toThrow(/Points: got 0 numbers, expected 6/);
  });

  it.each<[string, readonly number[], Uint8Array, RegExp]>([
    ['a block longer than said', [1, 48, 40, packed.length], packed, /block 0 of 1 unpacks to more bytes, expected 40/],
    ['a block shorter than said', [1, 48, 96, packed.length], packed, /block 0 of 1 unpacks to 48 bytes, expected 96/],
    ['more than can be packed so', [1, 2 ** 31, 0, packed.length], packed, /at most 1032 times as many/],
    ['more blocks than there are', [2 ** 31, 48, 0, packed.length], packed, /2147483648 packed blocks.*cut short/],
    ['a block beyond the end', [1, 48, 0, 2 ** 31], packed, /should be 2147483648 bytes long.*cut short/],
    ['a block of nothing', [1, 48, 0, 1], packed, /block 0 of 1 is 1 bytes long/],
    [
      'no zlib',
      [1, 48, 0, packed.length],
      Uint8Array.from(packed, (byte) => ~byte),
      /block 0 of 1 does not unpack: invalid zlib/,
    ],
    [
      'another checksum',
      [1, 48, 0, packed.length],
      Uint8Array.from(packed, (byte, at) => (at === packed.length - 1 ? byte ^ 1 : byte)),
      /block 0 of 1 does not match its checksum/,
    ],
  ])('refuses %s', (_, header, data, message) => {
    expect(() => tree(header, data)).toThrow(InputError);
    expect(() => tree(header, data)).toThrow(message);
  });

  it('unpacks the same bytes as another packer made, long enough for its sums to wrap', () => {
    // 2 + 20,000 points, of which two belong to the vessel; Node's zlib packs and states the checksum.
    const many = new Float64Array(3 * 20_002).map((_, i) => (i < 3 ? 0 : 1 / (i + 0.1)));
    const bytes = new Uint8Array(many.buffer);
    const half = 8 * 30_000;
    const [a, b] = [deflateSync(bytes.subarray(0, half)), deflateSync(bytes.subarray(half), { level: 0 })];
    const header = [2, half, bytes.length - half, a.length, b.length];
    const file = swap(
      vesselWithPoints(header, new Uint8Array(Buffer.concat([a, b]))),
      'NumberOfPoints="2"',
      'NumberOfPoints="20002"',
    );
    const { forest } = decode('tree.vtp', file).record;
    expect(Array.from(forest.position.slice(3, 6))).toEqual([1 / 3.1, 1 / 4.1, 1 / 5.1]);
  });

  it('names the packers it does not know', () => {
    const file = swap(bytesOf('compressed.vtp'), 'vtkZLibDataCompressor', 'vtkLZ4DataCompressor');
    expect(() => decode('tree.vtp', file)).toThrow(
      /tree.vtp: got data packed by vtkLZ4DataCompressor, expected vtkZLibDataCompressor or a file written uncompressed/,
    );
  });

  for (const name of ['compressed-blocks.vtp', 'compressed-blocks-raw.vtp', 'grid-compressed.vtu']) {
    it(`answers every changed byte of ${name} with a fault, or with the same tree`, () => {
      const bytes = bytesOf(name);
      const want = read(name).record.forest;
      let refused = 0;
      for (let at = 0; at < bytes.length; at++) {
        for (const bit of [1, 64]) {
          const broken = bytes.slice();
          broken[at]! ^= bit;
          try {
            const { forest } = decode(name, broken).record;
            expect(Array.from(forest.position)).toEqual(Array.from(want.position));
            expect(Array.from(forest.radius)).toEqual(Array.from(want.radius));
          } catch (error) {
            if (!(error instanceof InputError)) throw error;
            refused++;
          }
        }
      }
      expect(refused).toBeGreaterThan(bytes.length / 4);
    });
  }
});
