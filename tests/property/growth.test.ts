import { describe, expect, it } from 'vitest';
import { randomStream } from '../../src/core/random.ts';
import { growRun } from '../../src/run.ts';
import { randomSpec } from '../support/random-specs.ts';

const SPECS = 200;

describe('growth of random small specs', () => {
  const outcome = { complete: 0, short: 0, refused: 0 };

  for (let block = 0; block < 10; block++) {
    it(`specs ${block * 20 + 1} to ${block * 20 + 20}: every promise holds, or the run says which does not`, () => {
      for (let i = block * 20 + 1; i <= block * 20 + 20; i++) {
        const spec = randomSpec(randomStream('random specs', String(i)), `r${i}`);
        const result = growRun(spec, new Map());
        const broken = result.check.findings.map((finding) => `spec ${i}: ${finding.promise}: ${finding.message}`);
        // What was not served is a finding and a shortfall; nothing else may be broken.
        const unserved = broken.filter((line) => line.includes(': service'));
        expect(broken.filter((line) => !unserved.includes(line))).toEqual([]);
        if (result.stopped === 'complete') {
          expect(result.check.held).toBe(true);
          expect(result.shortfalls).toEqual([]);
          outcome.complete++;
        } else {
          expect(result.shortfalls.length).toBeGreaterThan(0);
          outcome.short++;
        }
      }
    });
  }

  it('mostly serves all that is asked', () => {
    expect(outcome.complete + outcome.short + outcome.refused).toBe(SPECS);
    expect(outcome.complete).toBeGreaterThan(0.85 * SPECS);
  });
});
