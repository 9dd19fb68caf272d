import { readdirSync, readFileSync } from 'node:fs';
import { describe, expect, it } from 'vitest';
import { VTP } from '../../../src/formats/tree/vtp.ts';

// Source: files written by VTK 9.1's own writer (see make-vtp.py beside them), rows in a scrambled order.
const FOLDER = new URL('../../fixtures/trees/', import.meta.url);
const read = (name: string) => VTP.decode([{ name, bytes: new Uint8Array(readFileSync(new URL(name, FOLDER))) }]);

const POSITION = [0, 0, 0, 1e-3, 0, 1e-4, 3e-3, 1e-3 / 3, 0, 3e-3, -1e-3 / 7, 2e-4];
const EXACT = [
  'ascii.vtp',
  'inline-base64.vtp',
  'appended-raw.vtp',
  'appended-base64-uint64.vtp',
  'big-endian-raw-int32.vtp',
  'big-endian-inline-uint64.vtp',
];

describe('decoding VTP of another writer', () => {
  it('covers every file there is', () => {
    const files = readdirSync(FOLDER).filter((name) => name.endsWith('.vtp'));
    expect(files.sort()).toEqual([...EXACT, 'float32-verts.vtp', 'polyline.vtp', 'compressed.vtp'].sort());
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
      expect(notes).toEqual([`${name}: does not say which trees drain; all were taken as supply`]);
    });
  }

  it('passes over the values of cells before the lines, and widens float32', () => {
    const { forest } = read('float32-verts.vtp').record;
    expect(Array.from(forest.radius)).toEqual([2e-4, 2e-4, 1.5e-4, 1e-4].map(Math.fround));
    expect(Array.from(forest.position)).toEqual(POSITION.map(Math.fround));
  });

  it('cuts lines of several points into vessels and supplies flow', () => {
    const { record, notes } = read('polyline.vtp');
    expect(Array.from(record.forest.radius)).toEqual([2e-4, 2e-4, 2e-4, 1e-4]);
    expect(Array.from(record.forest.flow)).toEqual([2, 2, 1, 1]);
    expect(notes[0]).toMatch(/holds no flow/);
  });

  it('refuses a compressed file and says what to do', () => {
    expect(() => read('compressed.vtp')).toThrow(
      /compressed.vtp: got data packed by vtkZLibDataCompressor, expected .*uncompressed/,
    );
  });
});
