import { describe, expect, test } from 'vitest';
import { findSize, RULES, runCell, TISSUES, type TissueName } from '../support/promise-cells.ts';

/* A slice of `npm run bench promises`: every tissue, rule and vessel volume, but few terminals and two seeds. */

const TERMINALS = 600;

describe.each(Object.keys(TISSUES) as TissueName[])('%s', (tissue) => {
  test.each(RULES.flatMap((rule) => [0.01, 0.05, 0.1].map((volume) => ({ rule, volume }))))(
    '$rule at $volume vessel: every promise holds, and all but a few terminals are served',
    ({ rule, volume }) => {
      const cell = { tissue, rule, volume };
      const size = findSize(cell, 300);
      for (const seed of ['1', '2']) {
        const run = runCell(cell, size, TERMINALS, seed, seed === '1' ? 'none' : 'quick');
        expect(run.broken, `seed ${seed}, size ${size}`).toEqual([]);
        // Not every tissue has room for a tenth of it to be vessel, least of all with so few terminals and wide trunks.
        if (volume === 0.1) continue;
        expect(run.volume / volume).toBeGreaterThan(0.5);
        expect(run.served / TERMINALS).toBeGreaterThanOrEqual(0.995);
      }
    },
  );
});
