import { expect, test } from 'vitest';
import { formatPath } from '../../../src/spec/path.ts';

test.each([
  [[], 'spec'],
  [['tissue'], 'tissue'],
  [['tissue', 'parts', 1, 'radius_mm'], 'tissue.parts[1].radius_mm'],
  [['$schema'], '$schema'],
  [['trees', 0, 'a b'], 'trees[0]["a b"]'],
  [['a"\n'], '["a\\"\\n"]'],
  [['k'.repeat(200)], `["${'k'.repeat(57)}..."]`],
])('%j is written %s', (path, text) => {
  expect(formatPath(path)).toBe(text);
});
