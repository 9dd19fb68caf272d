import { describe, expect, it } from 'vitest';
import { MMHG } from '../../../src/core/units.ts';
import { plotPressure } from '../../../viewer/plot.ts';
import { describeVessel } from '../../../viewer/vessel-panel.ts';
import { wayToRoot } from '../../../viewer/way.ts';
import { twoFacingTrees } from '../../support/viewer-tree.ts';

const record = twoFacingTrees();
const { forest } = record;
const field = record.field!;

/** Length of the tube of a row, written out. */
function length(row: number): number {
  const at = (node: number) => [0, 1, 2].map((k) => forest.position[3 * node + k]!);
  const [a, b] = [at(row), at(forest.parent[row]!)];
  return Math.hypot(a[0]! - b[0]!, a[1]! - b[1]!, a[2]! - b[2]!);
}

describe('wayToRoot', () => {
  it('follows parents to the root of the same tree, with the length so far', () => {
    for (const row of [1, 77, forest.treeStart[1]! + 1, forest.count - 1]) {
      const way = wayToRoot(record, row);
      expect(way.rows[0]).toBe(row);
      expect(forest.parent[way.rows.at(-1)!]).toBe(-1);
      expect(way.rows.at(-1)).toBe(forest.treeStart[forest.tree[row]!]);
      let sum = 0;
      for (let i = 0; i + 1 < way.rows.length; i++) {
        expect(forest.parent[way.rows[i]!]).toBe(way.rows[i + 1]);
        sum += length(way.rows[i]!);
      }
      expect(way.distance[0]).toBeCloseTo(sum, 12);
      expect(way.distance.at(-1)).toBe(0);
      expect(way.pressure).toEqual(way.rows.map((at) => field.pressure[at]));
    }
  });

  it('falls in pressure away from a supply root and rises away from a drain root', () => {
    const falls = wayToRoot(record, forest.treeStart[1]! - 1).pressure!;
    for (let i = 1; i < falls.length; i++) expect(falls[i]).toBeGreaterThan(falls[i - 1]!);
    const rises = wayToRoot(record, forest.count - 1).pressure!;
    for (let i = 1; i < rises.length; i++) expect(rises[i]).toBeLessThan(rises[i - 1]!);
  });

  it('has no pressure, and no plot, without a solution', () => {
    const way = wayToRoot(twoFacingTrees(false), 9);
    expect(way.pressure).toBeNull();
    expect(plotPressure(way)).toBeNull();
  });
});

describe('plotPressure', () => {
  it('draws one point a node and says both ends in words', () => {
    const way = wayToRoot(record, 60);
    const svg = plotPressure(way)!;
    const line = /<polyline points="([^"]*)"/.exec(svg)![1]!;
    expect(line.split(' ').length).toBe(way.rows.length);
    // 8000 Pa at the root.
    expect(svg).toContain(`${Number((8000 / MMHG).toPrecision(4))} mmHg at the root`);
    expect(svg).not.toContain('NaN');
  });
});

describe('describeVessel', () => {
  const value = (row: number, label: string) => describeVessel(record, row).find((line) => line.label === label);
  const four = (x: number) => String(Number(x.toPrecision(4)));

  it('shows a supply vessel in trade units', () => {
    const row = 40;
    expect(value(row, 'Radius')?.value).toBe(`${four(forest.radius[row]! * 1e6)} µm`);
    expect(value(row, 'Length')?.value).toBe(`${four(length(row) * 1e6)} µm`);
    expect(value(row, 'Flow')?.value).toBe(`${four(forest.flow[row]! * 60e9)} µL/min`);
    expect(value(row, 'Pressure in')?.value).toBe(`${four(field.pressure[forest.parent[row]!]! / MMHG)} mmHg`);
    expect(value(row, 'Pressure out')?.also).toBe(`${four(field.pressure[row]!)} Pa`);
    expect(value(row, 'Wall shear')?.value).toBe(`${four(field.wallShear[row]!)} Pa`);
    expect(value(row, 'Reynolds number')?.value).toBe(four(field.reynolds[row]!));
    expect(value(row, 'Strahler order')?.value).toBe(String(record.order[row]));
  });

  it('turns the ends round in a draining tree, where blood comes from the far end', () => {
    const row = forest.count - 1;
    expect(value(row, 'Pressure in')?.also).toBe(`${four(field.pressure[row]!)} Pa`);
    expect(value(row, 'Pressure out')?.also).toBe(`${four(field.pressure[forest.parent[row]!]!)} Pa`);
    expect(value(row, 'Transit to the root')).toBeDefined();
  });

  it('leaves out what the file does not hold', () => {
    const bare = describeVessel(twoFacingTrees(false), 40).map((line) => line.label);
    expect(bare).toEqual(['Radius', 'Length', 'Flow', 'Strahler order']);
  });
});
