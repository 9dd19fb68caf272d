import { describe, expect, it } from 'vitest';
import { InputError } from '../../src/core/errors.ts';
import { randomStream } from '../../src/core/random.ts';
import type { ByteSource, DecodedTree, NamedBytes, TreeFormat } from '../../src/formats/format.ts';
import { splitTreePath, TREE_FORMATS } from '../../src/formats/tree-formats.ts';
import type { TreeRecord } from '../../src/tree/forest.ts';
import { ZOO } from '../support/tree-zoo.ts';

function filesOf(format: TreeFormat, record: TreeRecord): NamedBytes[] {
  return format.encode(record).map(({ suffix, bytes }) => ({ name: `tree${suffix}`, bytes }));
}

/** Largest relative difference; 0 only where every bit is the same. */
function apart(got: ArrayLike<number>, want: ArrayLike<number>): number {
  expect(got.length).toBe(want.length);
  let worst = 0;
  for (let i = 0; i < want.length; i++) {
    if (Object.is(got[i], want[i])) continue;
    const scale = Math.abs(want[i]!);
    worst = Math.max(worst, scale === 0 ? Number.MIN_VALUE : Math.abs(got[i]! - want[i]!) / scale);
  }
  return worst;
}

/** A copy that shares nothing, to see that encoding leaves its input alone. */
function snapshot(record: TreeRecord): string {
  const columns = (value: object) =>
    Object.entries(value).map(([key, column]) =>
      ArrayBuffer.isView(column) ? [key, ...new Uint8Array(column.buffer)] : key,
    );
  return JSON.stringify([columns(record.forest), record.field === null ? null : columns(record.field), record.names]);
}

const FIELD = ['pressure', 'transit', 'viscosity', 'velocity', 'wallShear', 'reynolds', 'haematocrit'] as const;

it('has formats and records to test', () => {
  expect(TREE_FORMATS.map((format) => format.id)).toEqual(['vtp', 'csv', 'json', 'swc', 'vtu']);
  expect(Object.keys(ZOO).length).toBeGreaterThanOrEqual(6);
});

for (const format of TREE_FORMATS as readonly TreeFormat[]) {
  describe(`format ${format.id}`, () => {
    const keeps = (what: TreeFormat['keeps'][number]) => format.keeps.includes(what);

    it('says of every part of a record whether it keeps it', () => {
      const all = [...format.keeps, ...format.drops].sort();
      expect(all).toEqual(
        [
          'flow solution',
          'flows',
          'orders',
          'positions',
          'provenance',
          'radii',
          'territories',
          'tree index',
          'tree names and kinds',
        ].sort(),
      );
    });

    for (const [name, record] of Object.entries(ZOO)) {
      it(`carries ${name} there and back`, () => {
        const small = record.forest.count < 1000;
        const before = small ? snapshot(record) : '';
        const files = filesOf(format, record);
        expect(files.map((file) => file.name)).toEqual(format.parts.map((part) => `tree${part}`));
        if (small) expect(snapshot(record)).toBe(before);
        const { record: back, notes } = format.decode(files);
        const { forest } = back;
        expect(Array.from(forest.parent)).toEqual(Array.from(record.forest.parent));
        expect(Array.from(forest.tree)).toEqual(Array.from(record.forest.tree));
        expect(Array.from(forest.treeStart)).toEqual(Array.from(record.forest.treeStart));
        expect(apart(forest.position, record.forest.position)).toBeLessThanOrEqual(format.precision);
        expect(apart(forest.radius, record.forest.radius)).toBeLessThanOrEqual(format.precision);
        expect(Array.from(back.order)).toEqual(Array.from(record.order));
        expect(back.names).toEqual(record.names);
        expect(back.kinds).toEqual(record.kinds);
        if (keeps('flows')) {
          expect(apart(forest.flow, record.forest.flow)).toBeLessThanOrEqual(format.precision);
          expect(notes).toEqual([]);
        } else expect(notes.join()).toMatch(/no flow/);
        if (keeps('flow solution') && record.field !== null) {
          expect(back.field?.forest).toBe(forest);
          for (const key of FIELD)
            expect(apart(back.field![key], record.field[key])).toBeLessThanOrEqual(format.precision);
        } else expect(back.field).toBeNull();
        if (keeps('territories') && record.territory) {
          expect(apart(back.territory!, record.territory)).toBeLessThanOrEqual(format.precision);
        } else expect(back.territory ?? null).toBeNull();
        expect(back.provenance).toBe(keeps('provenance') ? record.provenance : null);
        // The same record gives the same bytes, the first time and after a trip.
        if (format.precision === 0) {
          const again = filesOf(format, back);
          for (const [k, file] of files.entries()) expect(Buffer.compare(again[k]!.bytes, file.bytes)).toBe(0);
        }
      });
    }

    it('refuses a file cut short anywhere, or reads what is whole in it, but never breaks', () => {
      const files = filesOf(format, ZOO['two trees, three children']!);
      let refused = 0;
      for (const [k, file] of files.entries()) {
        for (let cut = 0; cut < file.bytes.length; cut += 1 + Math.floor(file.bytes.length / 150)) {
          const broken = files.map((other, i) => (i === k ? { ...other, bytes: other.bytes.slice(0, cut) } : other));
          refused += expectAnswer(format, broken);
        }
      }
      expect(refused).toBeGreaterThan(100);
    });

    it('reads a file part by part as it reads it whole, faults and all', () => {
      if (format.decodeSource === undefined) return;
      const [file] = filesOf(format, ZOO['two trees, three children']!);
      const { name, bytes } = file!;
      const random = randomStream('sources', format.id);
      for (let round = 0; round < 300; round++) {
        const broken = bytes.slice(0, round % 3 === 0 ? Math.floor(random.next() * bytes.length) : bytes.length);
        if (round > 0) broken[Math.floor(random.next() * broken.length)] = 256 * random.next();
        const inParts = answerOf(() => format.decodeSource!(sourceOf(name, broken)));
        expect(inParts).toEqual(answerOf(() => format.decode([{ name, bytes: broken }])));
      }
    });

    it('answers bytes changed at random with a tree or with faults that name the file', () => {
      const random = randomStream('formats', format.id);
      const files = filesOf(format, ZOO['one junction']!);
      for (let round = 0; round < 1500; round++) {
        const broken = files.map((file) => ({ ...file, bytes: file.bytes.slice() }));
        const { bytes } = broken[Math.floor(random.next() * broken.length)]!;
        for (let k = 0; k <= 3 * random.next(); k++)
          bytes[Math.floor(random.next() * bytes.length)] = 256 * random.next();
        expectAnswer(format, broken);
      }
    });

    it('refuses bytes of another kind', () => {
      for (const text of [
        '',
        '\n',
        'solid box',
        '{',
        '[]',
        'null',
        '<a>',
        '<VTKFile>',
        '1,2,3\n',
        '\u0000\u0001',
        'x'.repeat(1e5),
      ]) {
        const files = format.parts.map((part) => ({ name: `tree${part}`, bytes: new TextEncoder().encode(text) }));
        expect(expectAnswer(format, files)).toBe(1);
      }
    });

    it('is found by its extension, in any case, and names its files', () => {
      for (const extension of format.extensions) {
        const { format: found, files } = splitTreePath(`a.b/Tree${extension.toUpperCase()}`, '--to');
        expect(found).toBe(format);
        expect(files.length).toBe(format.parts.length);
      }
    });
  });
}

/** Bytes as a file that is read part by part. */
function sourceOf(name: string, bytes: Uint8Array): ByteSource {
  return { name, size: bytes.length, readInto: (from, out) => out.set(bytes.subarray(from, from + out.length)) };
}

/** What decoding gave, or the faults it found. */
function answerOf(decode: () => DecodedTree): unknown {
  try {
    return decode();
  } catch (error) {
    if (!(error instanceof InputError)) throw error;
    return error.faults;
  }
}

/** 1 where the files were refused as they should be; fails on any other error. */
function expectAnswer(format: TreeFormat, files: NamedBytes[]): number {
  try {
    const { record } = format.decode(files);
    for (const r of record.forest.radius.slice()) expect(r).toBeGreaterThan(0);
    return 0;
  } catch (error) {
    if (!(error instanceof InputError)) throw error;
    for (const fault of error.faults) {
      expect(fault.where).toMatch(/^tree\./);
      expect(fault.message.length).toBeGreaterThan(5);
    }
    return 1;
  }
}

describe('splitTreePath', () => {
  it('lets either name of a two-file format stand for both', () => {
    for (const path of ['out/tree.csv', 'out/tree.nodes.csv', 'out/tree.vessels.csv']) {
      expect(splitTreePath(path, '--to')).toMatchObject({
        stem: 'out/tree',
        files: ['out/tree.nodes.csv', 'out/tree.vessels.csv'],
      });
    }
    expect(splitTreePath('TREE.VTP', '--to').files).toEqual(['TREE.VTP']);
  });

  it('lists what it knows when it does not know a name', () => {
    expect(() => splitTreePath('tree.xyz', '--to')).toThrow(
      /--to: got tree.xyz, expected .*\.vtp, \.csv, \.json, \.swc, \.vtu/,
    );
  });
});
