import { describe, expect, it } from 'vitest';
import { barLength } from '../../../viewer/overlay.ts';
import { extentOf, flowUnit, quantityOf } from '../../../viewer/quantities.ts';
import { grouped, readable } from '../../../viewer/readable.ts';
import { mendScale, niceStep, placeOf, ticksOf } from '../../../viewer/scale.ts';

describe('ticksOf', () => {
  it('gives round values on a linear scale', () => {
    expect(ticksOf({ low: 0, high: 60, log: false }, 6)).toEqual([0, 10, 20, 30, 40, 50, 60]);
    expect(ticksOf({ low: 5.25, high: 60.1, log: false }, 6)).toEqual([10, 20, 30, 40, 50, 60]);
    expect(ticksOf({ low: 0.05, high: 0.35, log: false }, 3)).toEqual([0.1, 0.2, 0.3]);
    expect(ticksOf({ low: -1, high: 1, log: false }, 4)).toEqual([-1, -0.5, 0, 0.5, 1]);
  });

  it('gives decades on a log scale, with what fits between', () => {
    expect(ticksOf({ low: 1, high: 1e6, log: true }, 7)).toEqual([1, 10, 100, 1000, 1e4, 1e5, 1e6]);
    expect(ticksOf({ low: 0.9, high: 1100, log: true }, 8)).toEqual([1, 3, 10, 30, 100, 300, 1000]);
    expect(ticksOf({ low: 27, high: 260, log: true }, 6)).toEqual([50, 100, 200]);
    // 13 decades do not fit into 6 marks: every third.
    expect(ticksOf({ low: 1e-6, high: 1e6, log: true }, 6)).toEqual([1e-6, 1e-3, 1, 1e3, 1e6]);
    // Too narrow for two decade marks: linear ones.
    expect(ticksOf({ low: 2.1, high: 2.9, log: true }, 4)).toEqual([2.2, 2.4, 2.6, 2.8]);
  });

  it('stays inside, in order, and within the number asked for', () => {
    for (const log of [false, true]) {
      for (let i = 1; i < 200; i++) {
        const low = 1e-9 * 1.37 ** i;
        const high = low * (1.02 + (i % 7) ** 3);
        const ticks = ticksOf({ low, high, log }, 6);
        expect(ticks.length).toBeGreaterThan(0);
        expect(ticks.length).toBeLessThanOrEqual(7);
        ticks.forEach((tick, k) => {
          expect(tick).toBeGreaterThanOrEqual(low * (1 - 1e-6));
          expect(tick).toBeLessThanOrEqual(high * (1 + 1e-6));
          if (k > 0) expect(tick).toBeGreaterThan(ticks[k - 1]!);
        });
      }
    }
  });
});

describe('scales', () => {
  it('places the ends at 0 and 1, and the geometric middle of a log scale at a half', () => {
    expect(placeOf({ low: 2, high: 6, log: false }, 5)).toBe((5 - 2) / (6 - 2));
    expect(placeOf({ low: 2, high: 32, log: true }, 8)).toBeCloseTo(0.5, 12);
  });

  it('mends what cannot be used', () => {
    expect(mendScale(5, 1, false, 1)).toEqual({ low: 1, high: 5, log: false });
    expect(mendScale(0, 5, true, 0.25)).toEqual({ low: 0.25, high: 5, log: true });
    const point = mendScale(3, 3, false, 3);
    expect(point.low).toBe(3 - 0.05 * 3);
    expect(point.high).toBe(3 + 0.05 * 3);
    const nothing = mendScale(0, 0, true, 0);
    expect(nothing.low).toBeGreaterThan(0);
    expect(nothing.high).toBeGreaterThan(nothing.low);
  });

  it('steps by 1, 2 and 5', () => {
    expect(niceStep(10, 10)).toBe(1);
    expect(niceStep(10, 6)).toBe(2);
    expect(niceStep(10, 2)).toBe(5);
    expect(niceStep(60, 7)).toBe(10);
  });
});

describe('writing numbers', () => {
  it('keeps four digits and drops zeros', () => {
    expect(readable(0)).toBe('0');
    expect(readable(12.50001)).toBe('12.5');
    expect(readable(123456)).toBe('123456');
    expect(readable(-0.25)).toBe('−0.25');
    expect(readable(2.5e-7)).toBe('2.5 × 10⁻⁷');
    expect(readable(3e8)).toBe('3 × 10⁸');
    expect(grouped(1234567)).toBe('1\u2009234\u2009567');
  });

  it('chooses units by size', () => {
    // 1.2 mL/min in m³/s is 1.2e-6/60.
    expect(flowUnit(1.2e-6 / 60).unit).toBe('mL/min');
    expect(flowUnit(0.9e-6 / 60).unit).toBe('µL/min');
    expect(flowUnit(0.9e-12 / 60).unit).toBe('nL/min');
    expect(flowUnit(1.2e-6 / 60).from(1.2e-6 / 60)).toBeCloseTo(1.2, 12);
    expect(quantityOf('pressure').shown(1).from(8000)).toBeCloseTo(8000 / 133.322387415, 9);
    expect(extentOf([3, -1, 0, 2])).toEqual({ least: -1, largest: 3, leastPositive: 2 });
  });

  it('picks a length bar of 1, 2 or 5', () => {
    expect(barLength(3.1e-3)).toEqual({ length: 2e-3, label: '2 mm' });
    expect(barLength(9.9e-4).label).toBe('500 µm');
    expect(barLength(1.2e-2).label).toBe('1 cm');
  });
});
