import { describe, expect, it } from 'vitest';
import { VTP } from '../../../src/formats/tree/vtp.ts';
import { VTU } from '../../../src/formats/tree/vtu.ts';
import { ZOO } from '../../support/tree-zoo.ts';

const record = ZOO['two trees, three children']!;
const textOf = (format: typeof VTP) => Buffer.from(format.encode(record)[0]!.bytes).toString('latin1');
const namesIn = (text: string) => [...text.matchAll(/ Name="(\w+)"/g)].map((match) => match[1]);

describe('writing VTK files', () => {
  for (const format of [VTP, VTU]) {
    it(`lays the data of .${format.id} out from the last declared array to the first, without gaps`, () => {
      const text = textOf(format);
      const offsets = [...text.matchAll(/ offset="(\d+)"/g)].map((match) => Number(match[1])).reverse();
      const pool = Buffer.from(text.slice(text.indexOf('_', text.indexOf('<AppendedData')) + 1), 'latin1');
      expect(offsets.length).toBeGreaterThan(8);
      let at = 0;
      for (const offset of offsets) {
        expect(offset).toBe(at);
        at += 8 + Number(pool.readBigUint64LE(at));
      }
      expect(pool.subarray(at).toString('latin1')).toBe('\n  </AppendedData>\n</VTKFile>\n');
    });
  }

  it('gives a grid the arrays of the lines, texts as codes and a type a cell besides', () => {
    const [flat, grid] = [textOf(VTP), textOf(VTU)];
    expect(namesIn(grid)).toEqual([...namesIn(flat), 'types']);
    expect(flat.match(/<Array type="String"/g)?.length).toBeGreaterThanOrEqual(2);
    expect(grid).not.toMatch(/<Array|String/);
    expect(grid).toMatch(/<DataArray type="UInt8" Name="tree_names" NumberOfTuples="\d+"/);
  });
});
