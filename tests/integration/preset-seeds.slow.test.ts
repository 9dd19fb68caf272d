import { describe, expect, it } from 'vitest';
import { growRun } from '../../src/run.ts';
import { loadPreset, PRESETS } from '../support/presets.ts';

/** Every preset at full size, seeds 1 to 20: every promise holds, or the run says which does not. */
describe('presets over seeds', () => {
  for (const name of PRESETS) {
    it(`${name}, seeds 1 to 20`, () => {
      const { spec, surfaces } = loadPreset(name);
      const short: string[] = [];
      for (let seed = 1; seed <= 20; seed++) {
        const result = growRun({ ...spec, seed: String(seed) }, surfaces);
        const broken = result.check.findings.map((finding) => `seed ${seed}: ${finding.promise}: ${finding.message}`);
        expect(broken).toEqual([]);
        expect(result.check.held).toBe(true);
        short.push(...result.shortfalls.map((line) => `seed ${seed}: ${line}`));
      }
      // A preset is a promise of its own: it serves all it asks for.
      expect(short).toEqual([]);
    });
  }
});
