import { describe, expect, it } from 'vitest';
import { InputError } from '../../../src/core/errors.ts';
import { growRun } from '../../../src/run.ts';
import { specFromValue } from '../../../src/spec/parse.ts';

const grow = (tissue: object) =>
  growRun(
    specFromValue({
      tissue,
      trees: [
        {
          inlet: { position_mm: [0, 5, 5], direction: [1, 0, 0], flow_uL_min: 50, pressure_mmHg: 60 },
          terminals: { count: 5, pressure_mmHg: 30 },
        },
      ],
      sizing: { rule: 'pressure-matched' },
    }),
    new Map(),
  );

const BLOCK = { shape: 'box', min_mm: [0, 0, 0], max_mm: [10, 10, 10] };

describe('the stub of an inlet', () => {
  it('leads in from the boundary', () => expect(grow(BLOCK).check.held).toBe(true));

  it('does not pass through a cut behind a thin wall', () => {
    const cut = { shape: 'box', min_mm: [0.05, -1, -1], max_mm: [0.35, 11, 11] };
    expect(() => grow({ shape: 'difference', of: BLOCK, minus: [cut] })).toThrow(InputError);
  });
});
