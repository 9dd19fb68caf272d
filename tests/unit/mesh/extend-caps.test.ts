import { describe, expect, it } from 'vitest';
import { solveFlow } from '../../../src/flow/solve.ts';
import { extendCaps, extendField } from '../../../src/mesh/extend-caps.ts';
import { tubeLength } from '../../../src/tree/vessels.ts';
import { forkSketch, sketchForest } from '../../support/lumen-forests.ts';

const options = { viscosity: 3.5e-3, density: 1060 };
const forest = sketchForest(forkSketch(40, 30, 0.8, 0.6));

describe('extensions', () => {
  it.each(['supply', 'drain'] as const)('of a %s tree are straight, and its solution inside stays', (kind) => {
    const field = solveFlow(forest, [kind], { ...options, rootPressures: [8000] });
    const extended = extendCaps(forest, 5);
    expect(extended.short).toEqual([]);
    const after = extendField(extended, forest, field);
    for (let row = 0; row < forest.count; row++) {
      const place = (of: typeof forest, at: number) => [0, 1, 2].map((k) => of.position[3 * at + k]!);
      // Row 1 is the junction.
      if (row === 1) {
        expect(place(extended.forest, row)).toEqual(place(forest, row));
        expect(after.pressure[row]).toBe(field.pressure[row]);
        continue;
      }
      const vessel = Math.max(row, 1);
      const r = forest.radius[vessel]!;
      const moved = place(extended.forest, row).map((x, k) => x - place(forest, row)[k]!);
      expect(Math.hypot(...moved) / (10 * r)).toBeCloseTo(1, 12);
      expect(extended.extension[row]! / (10 * r)).toBeCloseTo(1, 12);
      // Away from the junction, along the axis.
      const out = place(forest, row).map((x, k) => x - place(forest, 1)[k]!);
      expect(
        moved.reduce((sum, x, k) => sum + x * out[k]!, 0) / (Math.hypot(...moved) * Math.hypot(...out)),
      ).toBeCloseTo(1, 12);
      // Hagen–Poiseuille along the extension: 8 µ Q L / (π r⁴).
      const drop = (8 * options.viscosity * forest.flow[vessel]! * 10 * r) / (Math.PI * r ** 4);
      const rises = (row === 0) === (kind === 'supply');
      expect((after.pressure[row]! - field.pressure[row]!) / (rises ? drop : -drop)).toBeCloseTo(1, 9);
    }
    // Solved anew from its own inlet it is the same.
    const anew = solveFlow(extended.forest, [kind], { ...options, rootPressures: [after.pressure[0]!] });
    for (let row = 0; row < forest.count; row++) expect(anew.pressure[row]! / after.pressure[row]!).toBeCloseTo(1, 9);
  });

  it('end before another vessel, and tell which', () => {
    // The first tree's tip points at the second tree, 3 mm away; their radii leave 3 − 1.05 · 0.2 mm.
    const facing = sketchForest(
      [
        [-1, 0, 0, 0, 1e-4],
        [0, 4e-3, 0, 0, 1e-4],
      ],
      [
        [-1, 7e-3, -5e-3, 0, 1e-4],
        [0, 7e-3, 5e-3, 0, 1e-4],
      ],
    );
    const { short, forest: after, extension } = extendCaps(facing, 18);
    expect(short).toEqual(
      [{ row: 1, blocker: 3, got: 0.75 * 3.6e-3, wanted: 3.6e-3 }].map((one) =>
        expect.objectContaining({
          row: one.row,
          blocker: one.blocker,
          got: expect.closeTo(one.got, 9),
          wanted: expect.closeTo(one.wanted, 9),
        }),
      ),
    );
    expect(tubeLength(after, 1)).toBeCloseTo(4e-3 + extension[0]! + 2.7e-3, 9);
    expect(extendCaps(facing, 10).short).toEqual([]);
  });

  it('of two caps that face each other do not meet', () => {
    const facing = sketchForest(
      [
        [-1, 0, 0, 0, 1e-4],
        [0, 4e-3, 0, 0, 1e-4],
      ],
      [
        [-1, 10e-3, 0, 0, 1e-4],
        [0, 6e-3, 0, 0, 1e-4],
      ],
    );
    // 2 mm between the tips: 1.5 mm each would meet.
    const { forest: after, short } = extendCaps(facing, 7.5);
    expect(short.map(({ row }) => row)).toEqual([3]);
    expect(after.position[3 * 3]! - after.position[3]!).toBeGreaterThan(1.05 * 2e-4);
  });

  it('are refused out of range', () => {
    expect(() => extendCaps(forest, -1)).toThrow(/0 to 100/);
    expect(() => extendCaps(forest, Number.NaN)).toThrow(/0 to 100/);
    expect(extendCaps(forest, 0).forest.position).toEqual(Float64Array.from(forest.position));
  });
});
