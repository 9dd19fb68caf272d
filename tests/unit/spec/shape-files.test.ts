import { expect, test } from 'vitest';
import { specFromValue } from '../../../src/spec/parse.ts';
import { shapeFiles } from '../../../src/spec/shape-files.ts';
import { soundSpec } from '../../support/bend-spec.ts';

const surface = (file: string) => ({ shape: 'surface', file });

test('a spec without surfaces needs no files', () => {
  expect(shapeFiles(specFromValue(soundSpec()))).toEqual([]);
});

test('every file once, in the order of first mention, however deep and in forbidden parts', () => {
  const tissue = {
    shape: 'difference',
    of: { shape: 'union', parts: [surface('b.stl'), surface('a.ply')] },
    minus: [{ shape: 'intersection', parts: [surface('c.obj'), surface('b.stl')] }],
    forbidden: [surface('d.stl'), surface('a.ply')],
  };
  expect(shapeFiles(specFromValue({ ...soundSpec(), tissue }))).toEqual(['b.stl', 'a.ply', 'c.obj', 'd.stl']);
});
