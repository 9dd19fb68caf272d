import { expect, test } from 'vitest';
import { StateOut } from '../../../src/core/state.ts';
import { TerminalSites } from '../../../src/growth/terminal-sites.ts';

test('keeps sites past the rows it began with, and none where none was told', () => {
  const sites = new TerminalSites();
  sites.keep(3, 30);
  sites.keep(5000, 31);
  sites.keep(4999, 32);
  sites.forget(4999);
  expect([2, 3, 4, 4999, 5000].map((row) => sites.of(row))).toEqual([-1, 30, -1, -1, 31]);
});

test('saves the rows that there are, and no more', () => {
  const sites = new TerminalSites();
  for (let row = 0; row < 4; row++) sites.keep(row, 10 + row);
  const out = new StateOut();
  sites.save(out, 3);
  expect(out.columns.map(({ name, kind, values }) => [name, kind, [...values]])).toEqual([
    ['siteOf', 'i32', [10, 11, 12]],
  ]);
});
