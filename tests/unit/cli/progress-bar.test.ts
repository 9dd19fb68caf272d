import { describe, expect, test } from 'vitest';
import { Pace } from '../../../src/cli/pace.ts';
import { describeProgress } from '../../../src/cli/progress-bar.ts';

/** A pace that has seen `rate` units a second from `from` on, ten times a second for some seconds. */
function seen(rate: number, from: number, seconds: number, total: number): Pace {
  const pace = new Pace();
  for (let k = 0; k <= 10 * seconds; k++) pace.see(k / 10, from + (rate * k) / 10, total);
  return pace;
}

describe('Pace', () => {
  test('tells rate and time left of steady work', () => {
    const pace = seen(500, 0, 20, 100_000);
    expect(pace.rate).toBeCloseTo(500, 6);
    expect(pace.left).toBeCloseTo((100_000 - 500 * 20) / 500, 6);
  });

  test('does not count what an interrupted run has done', () => {
    const pace = seen(500, 60_000, 20, 100_000);
    expect(pace.rate).toBeCloseTo(500, 6);
    expect(pace.left).toBeCloseTo((100_000 - 60_000 - 500 * 20) / 500, 6);
  });

  test('forgets what is more than half a minute ago', () => {
    const pace = seen(1000, 0, 60, 1_000_000);
    for (let k = 1; k <= 400; k++) pace.see(60 + k / 10, 60_000 + 10 * k, 1_000_000);
    expect(pace.rate).toBeCloseTo(100, 6);
  });

  test('tells nothing in the first second, nor where nothing is done', () => {
    expect(seen(500, 0, 0.5, 100).left).toBeNull();
    expect(seen(0, 5, 20, 100).left).toBeNull();
  });

  test('begins anew where work was undone', () => {
    const pace = seen(500, 0, 20, 100_000);
    pace.see(21, 9000, 100_000);
    expect(pace.rate).toBe(0);
    pace.see(23, 9200, 100_000);
    expect(pace.rate).toBeCloseTo(200 / 2, 6);
  });
});

describe('describeProgress', () => {
  test('growth: terminals, rate and time left', () => {
    const pace = seen(8123, 0, 10, 1_000_000);
    expect(describeProgress({ stage: 'growth', done: 81_230, total: 1_000_000 }, pace)).toBe(
      `  81,230 of 1,000,000 terminals, 8,120 a second, about ${Math.round((1_000_000 - 81_230) / 8123 / 60)} min left`,
    );
  });

  test('other stages: time left alone', () => {
    expect(describeProgress({ stage: 'refine', done: 20, total: 60 }, seen(2, 0, 10, 60))).toBe('  about 20 s left');
    expect(describeProgress({ stage: 'refine', done: 0, total: 60 }, new Pace())).toBe('');
  });
});
