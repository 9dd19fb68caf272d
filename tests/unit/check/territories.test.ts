import { describe, expect, test } from 'vitest';
import { checkTree } from '../../../src/check/check-tree.ts';
import { buildNearestTree } from '../../../src/check/nearest.ts';
import type { CheckResult } from '../../../src/check/result.ts';
import { randomStream } from '../../../src/core/random.ts';
import { growRun } from '../../../src/run.ts';
import { specFromValue } from '../../../src/spec/parse.ts';
import type { Spec } from '../../../src/spec/types.ts';
import type { TreeRecord } from '../../../src/tree/forest.ts';

const NONE = new Map();

test('the nearest of many points is found, as by trying all', () => {
  const random = randomStream('nearest', 'check');
  for (const n of [1, 2, 9, 200, 3000]) {
    // Clusters, and planes of equal coordinates.
    const points = Float64Array.from({ length: 3 * n }, (_, i) =>
      i % 5 === 0 ? 0.5 : i % 7 < 3 ? 0.1 * random.next() : random.next(),
    );
    const tree = buildNearestTree(points);
    for (let round = 0; round < 300; round++) {
      const [x, y, z] = [random.next(), random.next(), 1.4 * random.next() - 0.2];
      const away = (i: number) => Math.hypot(points[3 * i]! - x, points[3 * i + 1]! - y, points[3 * i + 2]! - z);
      let least = Number.POSITIVE_INFINITY;
      for (let i = 0; i < n; i++) least = Math.min(least, away(i));
      expect(away(tree.nearest(x, y, z))).toBe(least);
    }
  }
});

const SPEC = specFromValue({
  tissue: {
    shape: 'box',
    min_mm: [0, 0, 0],
    max_mm: [12, 12, 6],
    demand: [{ shape: 'sphere', center_mm: [8, 8, 3], radius_mm: 2.5, weight: 5 }],
  },
  trees: [
    {
      inlet: { position_mm: [0, 6, 3], direction: [1, 0, 0], pressure_mmHg: 60, flow_mL_min: 0.15 },
      terminals: { count: 150, flow_share: 'territory' },
    },
    {
      kind: 'drain',
      inlet: { position_mm: [12, 6, 3], direction: [-1, 0, 0], flow_mL_min: 0.15 },
      terminals: { count: 20 },
    },
  ],
});
const { record, check } = growRun(SPEC, NONE);

function verdict(result: CheckResult, id: string) {
  const promise = result.promises.find((one) => one.id === id)!;
  return { held: promise.held, failures: promise.failures };
}

function spoiled(change: (territory: Float64Array, terminals: number[]) => void): TreeRecord {
  const { forest } = record;
  const territory = record.territory!.slice();
  const terminals: number[] = [];
  for (let i = 1; i < forest.treeStart[1]!; i++) if (territory[i]! > 0) terminals.push(i);
  change(territory, terminals);
  return { ...record, territory };
}

describe('territories', () => {
  test('of a grown tree hold, and flows are theirs', () => {
    expect(check.findings).toEqual([]);
    const promise = check.promises.find((one) => one.id === 'territory')!;
    expect(promise.held).toBe(true);
    expect(promise.checked).toBe(150);
    expect(promise.note).toMatch(/^supply: \d+ samples a terminal, off by [\d.]+ s\^\(1\/3\) of s samples/);
    // The tree that shares its flow equally has none.
    const { treeStart } = record.forest;
    expect(record.territory!.slice(treeStart[1]!).every((size) => size === 0)).toBe(true);
  });

  test('are no promise where nobody asked', () => {
    const equal: Spec = { ...SPEC, trees: SPEC.trees.slice(1) };
    expect(growRun(equal, NONE).check.promises.map((one) => one.id)).not.toContain('territory');
  });

  test('two terminals that have each other’s are found', () => {
    const result = checkTree(
      spoiled((territory, terminals) => {
        const sorted = terminals.sort((a, b) => territory[a]! - territory[b]!);
        const [least, most] = [sorted[0]!, sorted[149]!];
        [territory[least], territory[most]] = [territory[most]!, territory[least]!];
      }),
      SPEC,
      NONE,
    );
    expect(verdict(result, 'territory')).toEqual({ held: false, failures: 3 });
    // The two, and the mean over all; flows are no longer those told either.
    expect(verdict(result, 'terminal-flow')).toEqual({ held: false, failures: 2 });
  });

  test('equal shares where they should differ are found, told or not', () => {
    const { forest } = record;
    const flow = forest.flow.slice();
    for (let i = 0; i < forest.treeStart[1]!; i++) if (record.territory![i]! > 0) flow[i] = forest.flow[0]! / 150;
    const even = { ...record, forest: { ...forest, flow } };
    const told = record.territory!.slice();
    let whole = 0;
    for (const size of told) whole += size;
    const evenly = told.map((size) => (size > 0 ? whole / 150 : 0));
    for (const territory of [evenly, null]) {
      const result = checkTree({ ...even, territory }, SPEC, NONE);
      expect(verdict(result, 'territory').held).toBe(false);
      expect(verdict(result, 'territory').failures).toBeGreaterThan(10);
    }
    // Told truly, but not heeded.
    expect(verdict(checkTree(even, SPEC, NONE), 'terminal-flow').held).toBe(false);
    expect(verdict(checkTree(even, SPEC, NONE), 'territory').held).toBe(true);
  });

  test('all of them twice too large are found', () => {
    const result = checkTree(
      spoiled((territory) => {
        for (let i = 0; i < territory.length; i++) territory[i]! *= 2;
      }),
      SPEC,
      NONE,
    );
    expect(verdict(result, 'territory').held).toBe(false);
    expect(verdict(result, 'terminal-flow').held).toBe(true);
  });

  test('of a demand that was not heeded are found', () => {
    const { demand: _, ...even } = SPEC;
    expect(verdict(checkTree(record, even, NONE), 'territory').held).toBe(false);
  });

  test('of vessels that are no terminals, or share otherwise, are found', () => {
    const inner = checkTree(
      spoiled((territory) => {
        territory[1] = 1e-12;
      }),
      SPEC,
      NONE,
    );
    expect(verdict(inner, 'territory')).toEqual({ held: false, failures: 1 });
    expect(inner.findings[0]!.message).toMatch(/is no terminal that shares by it/);
    const other = checkTree(
      spoiled((territory) => {
        territory[territory.length - 1] = 1e-12;
      }),
      SPEC,
      NONE,
    );
    expect(verdict(other, 'territory')).toEqual({ held: false, failures: 1 });
  });

  test('that the file does not tell leave flows to be held to those measured again', () => {
    const { territory: _, ...untold } = record;
    const result = checkTree(untold, SPEC, NONE);
    expect(result.held).toBe(true);
    const told = result.promises.find((one) => one.id === 'territory')!;
    expect(told.checked).toBe(150);
    expect(result.promises.find((one) => one.id === 'terminal-flow')!.note).toMatch(/tells no territories/);
  });
});
