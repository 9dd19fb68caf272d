import { describe, expect, it } from 'vitest';
import { randomStream } from '../../src/core/random.ts';
import { growRun } from '../../src/run.ts';
import { randomSpec } from '../support/random-specs.ts';

const SPECS = 200;

describe('growth of random small specs', () => {
  const outcome = { complete: 0, short: 0 };

  for (let block = 0; block < 10; block++) {
    it(`specs ${block * 20 + 1} to ${block * 20 + 20}: every promise holds, or the run says which does not`, () => {
      for (let i = block * 20 + 1; i <= block * 20 + 20; i++) {
        const spec = randomSpec(randomStream('random specs', String(i)), `r${i}`);
        const result = growRun(spec, new Map());
        // A terminal that was not served is told; nothing else may be broken.
        const broken = result.check.findings.filter((finding) => finding.promise !== 'terminals');
        expect(broken.map((finding) => `spec ${i}: ${finding.promise}: ${finding.message}`)).toEqual([]);
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
    expect(outcome.complete + outcome.short).toBe(SPECS);
    expect(outcome.complete).toBeGreaterThan(0.9 * SPECS);
    // The other branch is no dead letter.
    expect(outcome.short).toBeGreaterThan(0);
  });
});
