import { readFileSync, writeFileSync } from 'node:fs';
import { describe, expect, it } from 'vitest';
import { measurePower } from '../../src/flow/power.ts';
import { growRun } from '../../src/run.ts';
import type { Forest } from '../../src/tree/forest.ts';
import { loadPreset, PRESETS } from '../support/presets.ts';

/*
 * The same seed gives the same tree from one patch release to the next: counts and topology exact, power to its own
 * tolerance. UPDATE=1 is the only writer; its diff is read in review.
 */

const FILE = new URL('presets.json', import.meta.url);
const TERMINALS = 150;
const POWER_TOLERANCE = 1e-9;

interface Golden {
  readonly rows: number;
  readonly topology: string;
  readonly total_W: number;
}

/** FNV-1a over the parents. */
function topologyHash(forest: Forest): string {
  let hash = 0x811c9dc5;
  for (let i = 0; i < forest.count; i++) hash = Math.imul(hash ^ (forest.parent[i]! + 1), 0x01000193) >>> 0;
  return hash.toString(16).padStart(8, '0');
}

describe('presets as they were', () => {
  const golden = JSON.parse(readFileSync(FILE, 'utf8')) as Record<string, Golden>;
  const found: Record<string, Golden> = {};

  for (const name of PRESETS) {
    it(name, () => {
      const { spec, surfaces } = loadPreset(name, TERMINALS);
      const { record, check } = growRun(spec, surfaces);
      expect(check.held).toBe(true);
      const { forest } = record;
      const total = measurePower(forest, spec.blood.viscosity.value, spec.blood.maintenance).total;
      found[name] = { rows: forest.count, topology: topologyHash(forest), total_W: total };
      if (process.env['UPDATE'] === '1') return;
      expect(found[name].rows).toBe(golden[name]?.rows);
      expect(found[name].topology).toBe(golden[name]?.topology);
      expect(Math.abs(total / golden[name]!.total_W - 1)).toBeLessThan(POWER_TOLERANCE);
    });
  }

  it('has a line for every preset and no other', () => {
    if (process.env['UPDATE'] === '1') writeFileSync(FILE, `${JSON.stringify(found, null, 2)}\n`);
    else expect(Object.keys(golden)).toEqual(PRESETS);
    expect(PRESETS.length).toBeGreaterThanOrEqual(5);
  });
});
