import { readFileSync, writeFileSync } from 'node:fs';
import { afterEach, beforeEach, describe, expect, it } from 'vitest';
import { VTP } from '../../../src/formats/tree/vtp.ts';
import { InputError } from '../../../src/index.ts';
import { readTree } from '../../../src/node/index.ts';
import { readAll, withSource, writeContent } from '../../../src/node/large-files.ts';
import { makeScratch, type Scratch } from '../../support/run-cli.ts';
import { ZOO } from '../../support/tree-zoo.ts';

let scratch: Scratch;
beforeEach(() => {
  scratch = makeScratch();
});
afterEach(() => scratch.remove());

describe('files in pieces', () => {
  it('are the pieces one after another, small, large and empty', () => {
    const sizes = [0, 1, 7, 65_535, 65_536, 3, 65_530, 10, 200_000, 0, 5];
    const pieces = sizes.map((size, k) => new Uint8Array(size).map((_, i) => (31 * i + 7 * k) % 256));
    writeContent(scratch.path('a'), pieces);
    expect(Buffer.compare(readFileSync(scratch.path('a')), Buffer.concat(pieces))).toBe(0);
    writeContent(scratch.path('a'), 'µ');
    expect(readFileSync(scratch.path('a'), 'utf8')).toBe('µ');
  });

  it('may reuse one buffer for every piece', () => {
    const buffer = new Uint8Array(3);
    function* pieces(): Generator<Uint8Array> {
      for (let k = 0; k < 3; k++) yield buffer.fill(k);
    }
    writeContent(scratch.path('a'), pieces());
    expect([...readAll(scratch.path('a'))]).toEqual([0, 0, 0, 1, 1, 1, 2, 2, 2]);
  });

  it('are read from any place on', () => {
    writeFileSync(scratch.path('a'), Uint8Array.of(1, 2, 3, 4, 5));
    withSource(scratch.path('a'), 'a', (source) => {
      expect(source).toMatchObject({ name: 'a', size: 5 });
      const out = new Uint8Array(2);
      source.readInto(3, out);
      expect([...out]).toEqual([4, 5]);
      expect(() => source.readInto(4, out)).toThrow(InputError);
    });
  });

  it('of a tree give the record that the whole bytes give, and the bytes when asked', () => {
    for (const record of Object.values(ZOO)) {
      const file = VTP.encode(record)[0]!;
      writeContent(scratch.path('tree.vtp'), file.pieces!);
      const tree = readTree(scratch.path('tree.vtp'));
      expect(tree.record).toEqual(VTP.decode([{ name: 'tree.vtp', bytes: file.bytes }]).record);
      expect(Buffer.compare(tree.files[0]!.bytes, file.bytes)).toBe(0);
    }
  });
});
