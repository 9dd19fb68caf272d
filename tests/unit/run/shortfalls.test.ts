import { describe, expect, it } from 'vitest';
import { InputError } from '../../../src/core/errors.ts';
import { growRun } from '../../../src/run.ts';
import { specFromValue } from '../../../src/spec/parse.ts';

const box = (terminals: object, more: object = {}) =>
  specFromValue({
    tissue: { shape: 'box', min_mm: [0, 0, 0], max_mm: [10, 10, 10] },
    trees: [{ inlet: { position_mm: [0, 5, 5], direction: [1, 0, 0], flow_uL_min: 100 }, terminals }],
    ...more,
  });

describe('what cannot be served', () => {
  it('refuses explicit points outside the tissue, each by its place', () => {
    const spec = box({
      points_mm: [
        [5, 5, 8],
        [13, 5, 5],
        [5, 2, 2],
        [5, 5, 20],
      ],
    });
    try {
      growRun(spec, new Map());
      expect.unreachable();
    } catch (error) {
      expect(error).toBeInstanceOf(InputError);
      const faults = (error as InputError).faults.map((fault) => `${fault.where}: ${fault.message}`);
      expect(faults).toEqual([
        'trees[0].terminals.points[1]: got a point 3000 µm outside of the tissue, expected one inside',
        'trees[0].terminals.points[3]: got a point 10000 µm outside of the tissue, expected one inside',
      ]);
    }
  });

  it('names the points that no vessel could reach', () => {
    // The second lies so near the wall that the vessel's end would stick out.
    const result = growRun(
      box({
        points_mm: [
          [5, 5, 8],
          [5, 5, 9.9999],
        ],
      }),
      new Map(),
    );
    expect(result.stopped).toBe('no-room');
    expect(result.check.held).toBe(false);
    expect(result.shortfalls).toHaveLength(1);
    expect(result.shortfalls[0]).toContain('serves 1 of the 2 terminals');
    expect(result.shortfalls[0]).toContain('(5, 5, 10)');
  });

  it('tells how many of a count found no room', () => {
    const result = growRun(box({ count: 60 }, { clearance: { gap_um: 3000 } }), new Map());
    expect(result.stopped).toBe('no-room');
    expect(result.check.held).toBe(false);
    expect(result.check.promises.filter((promise) => promise.held === false).map((promise) => promise.id)).toEqual([
      'terminals',
    ]);
    expect(result.shortfalls[0]).toMatch(/serves \d+ of the 60 terminals/);
  });
});
