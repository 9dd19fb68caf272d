import { readFileSync } from 'node:fs';
import { describe, expect, it } from 'vitest';
import { growRun } from '../../../src/run.ts';
import { specFromValue } from '../../../src/spec/parse.ts';
import type { Forest } from '../../../src/tree/forest.ts';

interface Instance {
  readonly id: string;
  readonly root: readonly number[];
  readonly sinks: readonly (readonly number[])[];
  readonly flows: readonly number[];
  readonly optimalCost: number;
}

// Source: optima computed by enumerating every topology with two solvers and a certified lower bound; not published.
const { instances } = JSON.parse(
  readFileSync(new URL('../../fixtures/checks/steiner-instances.json', import.meta.url), 'utf8'),
) as { instances: Instance[] };

/** First vessels a thousandth of the instance's size, so that no length or clearance binds (but where branchings collapse). */
function steinerSpec(instance: Instance, refine: string, seed = '1') {
  const radius = 1e-5;
  return specFromValue({
    name: instance.id,
    seed,
    tissue: { shape: 'box', min_mm: [-10, -20, -20], max_mm: [25, 20, 20] },
    trees: [
      {
        // Least power: Q = (π/4) √(m/μ) r³.
        inlet: {
          position_mm: instance.root,
          flow_m3_s: (Math.PI / 4) * Math.sqrt(625 / 0.0035) * radius * radius * radius,
        },
        terminals: { points_mm: instance.sinks, flow_share: instance.flows },
      },
    ],
    sizing: { rule: 'least-power', maintenance_W_m3: 625 },
    refine,
  });
}

/** Σ flow^(2/3) length in the instance's units, from the finished forest alone. */
function steinerCost(forest: Forest, total: number): number {
  let cost = 0;
  for (let i = 1; i < forest.count; i++) {
    const a = forest.parent[i]!;
    const p = forest.position;
    const length = Math.hypot(p[3 * i]! - p[3 * a]!, p[3 * i + 1]! - p[3 * a + 1]!, p[3 * i + 2]! - p[3 * a + 2]!);
    const flow = (total * forest.flow[i]!) / forest.flow[0]!;
    cost += Math.cbrt(flow * flow) * length * 1e3;
  }
  return cost;
}

describe('explicit terminals against exact branching optima', () => {
  it('has instances to judge', () => expect(instances.length).toBeGreaterThanOrEqual(6));

  for (const instance of instances) {
    const total = instance.flows.reduce((sum, flow) => sum + flow, 0);

    it(`${instance.id}: relaxation alone is never below the optimum and within 3 %`, () => {
      const result = growRun(steinerSpec(instance, 'quick'), new Map());
      expect(result.check.held).toBe(true);
      const cost = steinerCost(result.record.forest, total);
      expect(cost).toBeGreaterThanOrEqual(instance.optimalCost * (1 - 1e-9));
      expect(cost).toBeLessThanOrEqual(instance.optimalCost * 1.03);
    });

    // Asked: within 10⁻⁶ for five of the six, within a thousandth for all, never below. G5d is the sixth: its collapsed
    // branchings stay apart by what a junction needs to be meshed.
    it.each(['1', '2', '3', '4'])(`${instance.id}: thorough is at the optimum, seed %s`, (seed) => {
      const result = growRun(steinerSpec(instance, 'thorough', seed), new Map());
      expect(result.check.held).toBe(true);
      const cost = steinerCost(result.record.forest, total);
      expect(cost).toBeGreaterThanOrEqual(instance.optimalCost * (1 - 1e-9));
      expect(cost).toBeLessThanOrEqual(instance.optimalCost * (instance.id === 'G5d' ? 1.001 : 1 + 1e-6));
    });
  }
});
