import { expect, test } from 'vitest';
import { equalShares, normaliseDirection, normaliseShares } from '../../../src/spec/normalise.ts';

test('a direction keeps its way and gets length 1', () => {
  expect(normaliseDirection([3, 0, -4])).toEqual([3 / 5, 0, -4 / 5]);
  expect(normaliseDirection([0, 1e-6, 0])).toEqual([0, 1, 0]);
  expect(normaliseDirection([-0, 0, 2])).toEqual([0, 0, 1]);
});

test('a direction that has length 1 already is left as it is, minus zero apart', () => {
  const once = normaliseDirection([1, 2, 3]);
  expect(normaliseDirection(once)).toEqual(once);
  expect(Object.is(normaliseDirection([-0, 0, 1])[0], 0)).toBe(true);
});

test('shares sum to 1 and keep their proportions', () => {
  expect(normaliseShares([1, 1, 2])).toEqual([1 / 4, 1 / 4, 2 / 4]);
  expect(normaliseShares([5])).toEqual([1]);
  const once = normaliseShares([1e-9, 3, 1e9]);
  expect(normaliseShares(once)).toEqual(once);
});

test('a million shares, where a plain sum would drift', () => {
  const once = normaliseShares(Array.from({ length: 1_000_000 }, (_, row) => 1 + (row % 7)));
  const twice = normaliseShares(once);
  expect(twice.every((share, row) => share === once[row])).toBe(true);
});

test('equal shares', () => {
  expect(equalShares(3)).toEqual([1 / 3, 1 / 3, 1 / 3]);
});
