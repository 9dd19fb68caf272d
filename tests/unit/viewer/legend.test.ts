import { describe, expect, it } from 'vitest';
import { MMHG } from '../../../src/core/units.ts';
import { paletteOf } from '../../../viewer/colours.ts';
import { describeLegend } from '../../../viewer/legend.ts';
import { extentOf, QUANTITIES, quantityOf } from '../../../viewer/quantities.ts';
import { mendScale } from '../../../viewer/scale.ts';
import { buildViewerTree, twoFacingTrees } from '../../support/viewer-tree.ts';

const record = twoFacingTrees();
const palette = paletteOf('night-straw');

function legendOf(id: string, low?: number, high?: number, log = false) {
  const quantity = quantityOf(id);
  const extent = extentOf(quantity.values(record)!);
  const scale = { low: low ?? extent.least, high: high ?? extent.largest, log };
  return describeLegend(record, quantity, scale, quantity.shown(extent.largest), palette, extent);
}

describe('describeLegend', () => {
  it('puts ticks of the shown unit where their values lie', () => {
    const legend = legendOf('pressure', 700, 8000);
    expect(legend.title).toBe('Pressure (mmHg)');
    expect(legend.ticks.map(({ label }) => label)).toEqual(['10', '20', '30', '40', '50', '60']);
    expect(legend.ticks[2]!.place).toBeCloseTo((30 * MMHG - 700) / (8000 - 700), 12);
    expect([legend.below, legend.above]).toEqual([false, false]);
    expect(legend.rings).toBe(true);
  });

  it('says where data lie beyond a clipped range', () => {
    expect(legendOf('pressure', 1000, 8000)).toMatchObject({ below: true, above: false });
    expect(legendOf('pressure', 700, 7000)).toMatchObject({ below: false, above: true });
  });

  it('gives each order and each tree a swatch', () => {
    expect(legendOf('order').swatches.map(({ label }) => label)).toEqual(['1', '2', '3', '4', '5', '6', '7', '8']);
    const trees = legendOf('tree').swatches;
    expect(trees.map(({ label, drain }) => [label, drain])).toEqual([
      ['supply', false],
      ['drain', true],
    ]);
    expect(trees.map(({ place }) => place)).toEqual([0, 1]);
    // A clipped range shows its own orders only; a single tree sits in the middle of its widened scale.
    expect(legendOf('order', 2.5, 5).swatches.map(({ label }) => label)).toEqual(['3', '4', '5']);
    const alone = buildViewerTree([{ name: 'only', kind: 'supply', root: [0, 0, 0], side: 1, levels: 2 }]);
    const scale = mendScale(0, 0, false, 0);
    const extent = { least: 0, largest: 0 };
    const single = describeLegend(alone, quantityOf('tree'), scale, quantityOf('tree').shown(0), palette, extent);
    expect(single.swatches).toEqual([{ place: 0.5, label: 'only', drain: false }]);
    expect(single.rings).toBe(false);
  });

  it('describes every quantity, with its unit or none', () => {
    const titles = QUANTITIES.map(({ id }) => legendOf(id).title);
    expect(titles).toEqual([
      'Radius (µm)',
      'Flow (mL/min)',
      'Pressure (mmHg)',
      'Mean velocity (mm/s)',
      'Wall shear (Pa)',
      'Reynolds number',
      'Transit time (ms)',
      'Strahler order',
      'Tree',
    ]);
  });

  it('has no values to show where a file holds no solution', () => {
    const bare = twoFacingTrees(false);
    const held = QUANTITIES.filter(({ values }) => values(bare) !== null).map(({ id }) => id);
    expect(held).toEqual(['radius', 'flow', 'order', 'tree']);
  });
});
