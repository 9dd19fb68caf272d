import { describe, expect, it } from 'vitest';
import type { PromiseResult } from '../../../src/check/result.ts';
import { measurePower } from '../../../src/flow/power.ts';
import { solveFlow } from '../../../src/flow/solve.ts';
import { buildReport } from '../../../src/report/build.ts';
import { CAUTION } from '../../../src/report/caution.ts';
import { formatNumber, powerUnit } from '../../../src/report/html.ts';
import type { PromiseLine, ReportInput } from '../../../src/report/input.ts';
import { renderReport } from '../../../src/report/render.ts';
import { withResources } from '../../../src/report/resources.ts';
import { promiseLines } from '../../../src/run-report.ts';
import type { Forest, TreeRecord } from '../../../src/tree/forest.ts';
import { strahlerOrders } from '../../../src/tree/strahler.ts';
import { caterpillarShape, completeShape, forestOf, forestOfShape, randomForest } from '../../support/small-trees.ts';

function inputOf(forest: Forest, more: Partial<ReportInput> = {}, solved = true): ReportInput {
  const kinds = Array.from({ length: forest.treeStart.length - 1 }, () => 'supply' as const);
  const record: TreeRecord = {
    forest,
    kinds,
    names: kinds.map((_, t) => `t${t}`),
    field: solved
      ? solveFlow(forest, kinds, { rootPressures: kinds.map(() => 9000), viscosity: 0.0035, density: 1060 })
      : null,
    order: strahlerOrders(forest),
    provenance: null,
  };
  return { program: 'p 1', record, power: measurePower(forest, 0.0035, 600), tissueVolume: 2, promises: [], ...more };
}

/** A trunk with a bend, a fork of 90° between unequal branches, one of which forks at 60°. Lengths 1 to 5 cm. */
const FORK = forestOf([
  [-1, 0, 0, 0, 2e-3, 3e-9],
  [0, 0.01, 0, 0, 2e-3, 3e-9],
  [1, 0.01, 0.02, 0, 1e-3, 3e-9],
  [2, 0.04, 0.02, 0, 5e-4, 1e-9],
  [2, 0.01, 0.06, 0, 8e-4, 2e-9],
  [4, 0.01 + 0.05 / 2, 0.06 + (0.05 * Math.sqrt(3)) / 2, 0, 3e-4, 1e-9],
  [4, 0.01 - 0.05 / 2, 0.06 + (0.05 * Math.sqrt(3)) / 2, 0, 4e-4, 1e-9],
]);

describe('buildReport', () => {
  it('counts vessels, terminals, junctions and bends', () => {
    const { counts } = buildReport(inputOf(FORK));
    expect(counts).toEqual({ trees: 1, vessels: 6, terminals: 3, junctions: 2, bends: 1 });
    const two = buildReport(inputOf(randomForest('report', 30, 2))).counts;
    expect(two.terminals).toBe(60);
    expect(two.trees).toBe(2);
    expect(two.vessels).toBe(two.terminals + two.junctions + two.bends);
  });

  it('states cost and volumes as given', () => {
    const input = inputOf(FORK);
    const { cost, volumes } = buildReport(input);
    expect(cost.total_W).toBe(input.power.total);
    expect(cost.pumping_W + cost.maintenance_W).toBe(cost.total_W);
    expect(volumes.fraction).toBe(input.power.volume / 2);
    expect(buildReport({ ...input, tissueVolume: null }).volumes.fraction).toBeNull();
  });

  it('gives statistics by order over elements', () => {
    const { orders } = buildReport(inputOf(FORK));
    expect(orders.map((order) => [order.order, order.segments, order.elements])).toEqual([
      [1, 3, 3],
      // The bend splits the trunk into two vessels but one segment; with the fork's thick branch it is one element.
      [2, 2, 1],
    ]);
    const [first, second] = orders;
    expect(first!.diameter_mean_m).toBeCloseTo((2 * (5e-4 + 3e-4 + 4e-4)) / 3, 15);
    expect(first!.diameter_deviation_m).toBeCloseTo(2 * Math.sqrt((1e-4 ** 2 + 1e-4 ** 2) / 2), 15);
    expect(first!.length_mean_m).toBeCloseTo((0.03 + 0.05 + 0.05) / 3, 15);
    expect(second!.length_mean_m).toBeCloseTo(0.01 + 0.02 + 0.04, 15);
    expect(second!.diameter_mean_m).toBeCloseTo((2 * (0.01 * 2e-3 + 0.02 * 1e-3 + 0.04 * 8e-4)) / 0.07, 15);
    expect(second!.diameter_deviation_m).toBe(0);
    expect(second!.pressure_mean_Pa!).toBeGreaterThan(first!.pressure_mean_Pa!);
    expect(buildReport(inputOf(FORK, {}, false)).orders[0]!.pressure_mean_Pa).toBeNull();
  });

  // Source: Strahler's rule, exact: 2^(g+1−k) elements of order k; caterpillar N elements and 1 of N − 1 segments.
  it('counts the elements of exact trees', () => {
    const complete = buildReport(inputOf(forestOfShape(completeShape(5))));
    expect(complete.orders.map((order) => order.elements)).toEqual([32, 16, 8, 4, 2, 1]);
    expect(complete.horton!.branching).toBeCloseTo(2, 12);
    const caterpillar = buildReport(inputOf(forestOfShape(caterpillarShape(9))));
    expect(caterpillar.orders.map((order) => [order.segments, order.elements])).toEqual([
      [9, 9],
      [8, 1],
    ]);
    expect(caterpillar.horton).toBeNull();
  });

  it('measures angles between branches', () => {
    const { angles } = buildReport(inputOf(FORK));
    expect(angles.pairs).toBe(2);
    expect(angles.mean_deg).toBeCloseTo((90 + 60) / 2, 10);
    expect(angles.deviation_deg).toBeCloseTo(Math.sqrt(15 * 15 * 2), 10);
    expect(angles.bins.reduce((sum, bin) => sum + bin.count, 0)).toBe(2);
    expect(angles.bins.length).toBe(18);
  });

  it('summarises terminal pressures by flow, with what was asked', () => {
    const input = inputOf(FORK, { askedPressures: [2000] });
    const { pressure } = input.record.field!;
    const [tree] = buildReport(input).trees;
    const ends = [3, 5, 6].map((row) => pressure[row]!);
    expect(tree!.terminal_pressure).toEqual({
      min_Pa: Math.min(...ends),
      mean_Pa: expect.closeTo((ends[0]! + ends[1]! + ends[2]!) / 3, 6),
      max_Pa: Math.max(...ends),
      asked_Pa: 2000,
    });
    expect(tree!.root_pressure_Pa).toBe(9000);
    expect(buildReport(inputOf(FORK, {}, false)).trees[0]!.terminal_pressure).toBeNull();
  });

  it('summarises the territories of terminals, where they are told', () => {
    const input = inputOf(FORK);
    const territory = Float64Array.from([0, 0, 0, 3e-9, 0, 1e-9, 2e-9]);
    const report = buildReport({ ...input, record: { ...input.record, territory } });
    expect(report.trees[0]!.territory).toEqual({
      min_m3: 1e-9,
      median_m3: 2e-9,
      max_m3: 3e-9,
      // (1, 2, 3): variance 2/3 about a mean of 2.
      variation: expect.closeTo(Math.sqrt(2 / 3) / 2, 12),
    });
    expect(renderReport(report)).toContain('<h2>Territories</h2>');
    expect(buildReport(input).trees[0]!.territory).toBeNull();
    expect(renderReport(buildReport(input))).not.toContain('Territories');
    const none = buildReport({ ...input, record: { ...input.record, territory: new Float64Array(7) } });
    expect(none.trees[0]!.territory).toBeNull();
  });

  it('keeps times and memory apart: all else is the same for the same tree', () => {
    const one = buildReport(
      inputOf(FORK, { resources: { wallTime: 1, costAgainstTime: [{ stage: 'growth', time_s: 1, cost_W: 2 }] } }),
    );
    const two = buildReport(inputOf(FORK, { resources: { wallTime: 2, peakMemory: 3 } }));
    expect({ ...one, resources: null }).toEqual({ ...two, resources: null });
    expect(one.resources.wall_time_s).toBe(1);
    expect(JSON.parse(JSON.stringify(one))).toEqual(one);
  });
});

const line = (more: Partial<PromiseLine>): PromiseLine => ({
  ...{ id: 'x', promise: 'x', sense: 'at-most', limit: 1, worst: 0, unit: '1', where: null, held: true },
  ...{ checked: 1, note: '' },
  ...more,
});

describe('promiseLines', () => {
  const third: PromiseResult = {
    ...{ id: 'gap', title: 'gaps are wide', sense: 'at-least', limit: 1 / 3e5, unit: 'm', worst: 1 / 7e5 },
    ...{ where: 't0:3', held: false, checked: 12, failures: 2, note: 'slack 1e-9 m' },
  };

  it('keeps every digit and the unit apart', () => {
    const check = {
      held: false,
      promises: [third, { ...third, worst: Infinity }],
      findings: [],
      warnings: [],
      recomputed: {},
    };
    const [told, endless] = promiseLines(check);
    expect(endless!.worst).toBeNull();
    expect(JSON.parse(JSON.stringify(told))).toEqual(told);
    expect(told).toEqual({
      ...{ id: 'gap', promise: 'gaps are wide', sense: 'at-least', limit: 1 / 3e5, worst: 1 / 7e5, unit: 'm' },
      ...{ where: 't0:3', held: false, checked: 12, note: 'slack 1e-9 m' },
    });
  });
});

describe('renderReport', () => {
  const hostile = '<img src=x onerror=alert(1)>&"\'';
  const report = buildReport(
    inputOf(randomForest('page', 60, 2), {
      notes: [hostile],
      promises: [
        line({ promise: hostile, unit: hostile, worst: 1.5, where: hostile, held: false, note: hostile }),
        line({ promise: 'blood is conserved', limit: 1e-10, worst: 1 / 3e15, where: 't0:3' }),
        line({ promise: 'gaps are wide', sense: 'at-least', limit: 2e-5, unit: 'm', worst: null, held: null }),
      ],
      resources: {
        wallTime: 3,
        peakMemory: 1e8,
        stages: [{ stage: hostile, time_s: 3 }],
        costAgainstTime: [
          { stage: hostile, time_s: 0, cost_W: 1e-5 },
          { stage: hostile, time_s: 1, cost_W: 2e-5 },
        ],
      },
    }),
  );
  const page = renderReport({ ...report, name: hostile, provenance: { name: hostile } });

  it('is one page that asks nothing of the network and runs nothing', () => {
    expect(page.startsWith('<!doctype html>')).toBe(true);
    expect(page).not.toMatch(
      /https?:|<script|@import|url\(|<link(?! rel="icon" href="data:,">)|src=x(?! onerror=alert\(1\)&gt;)/,
    );
    expect(page).not.toContain('<img');
  });

  it('says the caution, the promise that is not held and every note', () => {
    expect(page).toContain(CAUTION);
    expect(CAUTION).toMatch(/research and engineering, not for diagnosis or treatment/);
    expect(page).toContain('1 promise not held');
    expect(page.match(/NOT HELD/g)?.length).toBe(1);
    expect(page.match(/&lt;img/g)!.length).toBeGreaterThanOrEqual(8);
  });

  it('writes promises for reading: sense, four digits, unit', () => {
    expect(page).toContain('<td>3.333·10<sup>−16</sup></td><td>≤ 1·10<sup>−10</sup></td>');
    expect(page).toContain('<td>–</td><td>≥ 2·10<sup>−5</sup> m</td>');
  });

  it('has every tag closed and no number that is none', () => {
    const open: string[] = [];
    for (const [, close, name, rest] of page.matchAll(/<(\/?)([a-z][a-z0-9]*)([^>]*)>/g)) {
      if (['meta', 'link'].includes(name!) || rest!.endsWith('/')) continue;
      if (close === '') open.push(name!);
      else expect(open.pop()).toBe(name);
    }
    expect(open).toEqual([]);
    expect(page).not.toMatch(/NaN|undefined|Infinity|null/);
    expect(page.match(/<svg/g)?.length).toBe(7);
  });

  it('plots the cost of growth apart from what comes after, and either only where it changes', () => {
    const point = (stage: string, time_s: number, cost_W: number) => ({ stage, time_s, cost_W });
    const growth = [point('growth', 0, 1e-6), point('growth', 1, 1e-5)];
    const refine = [point('refine', 1, 1e-5), point('refine', 2, 9e-6)];
    const plots = (costAgainstTime: typeof growth) => [
      ...renderReport(withResources(report, { costAgainstTime })).matchAll(/<figcaption>(Cost[^<]*)/g),
    ];
    const titles = (costs: typeof growth) => plots(costs).map((match) => match[1]);
    expect(titles([...growth, ...refine])).toEqual(['Cost against time while the tree grows', 'Cost against time']);
    expect(titles(refine)).toEqual(['Cost against time']);
    expect(titles([growth[1]!, refine[0]!])).toEqual([]);
  });

  it('draws the smallest trees too', () => {
    const tube = forestOf([
      [-1, 0, 0, 0, 1e-4, 1e-9],
      [0, 0.01, 0, 0, 1e-4, 1e-9],
    ]);
    for (const solved of [true, false]) {
      const small = renderReport(buildReport(inputOf(tube, { tissueVolume: null }, solved)));
      expect(small).not.toMatch(/NaN|undefined|Infinity|null/);
    }
  });
});

describe('formatNumber', () => {
  it('writes four digits, a thin space between thousands and powers of ten', () => {
    expect(formatNumber(1234567)).toBe('1\u202f234\u202f567');
    expect(formatNumber(12345.678)).toBe('12\u202f346');
    expect(formatNumber(0.5)).toBe('0.5');
    expect(formatNumber(1 / 3)).toBe('0.3333');
    expect(formatNumber(-1.5e-9)).toBe('−1.5·10<sup>−9</sup>');
    expect(formatNumber(1.23456e21)).toBe('1.235·10<sup>21</sup>');
    expect(formatNumber(0)).toBe('0');
    expect(formatNumber(null)).toBe('–');
  });

  it('picks a unit of power', () => {
    expect([2, 2e-3, 2e-6, 2e-9].map((watts) => powerUnit(watts).unit)).toEqual(['W', 'mW', 'µW', 'nW']);
  });
});
