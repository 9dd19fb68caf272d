import { describe, expect, it } from 'vitest';
import { mergeCorners } from '../../../../src/formats/surface/corners.ts';

describe('mergeCorners', () => {
  it('merges equal corners, −0 with 0, drops unused ones and keeps the order of first use', () => {
    const corner = [9, 9, 9, 1, 2, 3, 0, 0, 0, 4, 5, 6, 1, 2, 3, -0, 0, -0];
    const { position, triangle } = mergeCorners(corner, [3, 1, 2, 4, 5, 3]);
    expect([...position]).toEqual([4, 5, 6, 1, 2, 3, 0, 0, 0]);
    expect([...triangle]).toEqual([0, 1, 2, 1, 2, 0]);
  });

  it('keeps corners apart that differ in the last bit of one coordinate', () => {
    const next = 1 + Number.EPSILON;
    const { position } = mergeCorners([1, 1, 1, next, 1, 1, 1, 1, next], [0, 1, 2]);
    expect(position).toHaveLength(9);
  });

  it('stays quick where many corners differ in few bits', () => {
    const n = 60_000;
    const corner = Array.from({ length: 3 * n }, (_, i) => (i % 3 === 0 ? Math.floor(i / 3) : 0));
    const { position } = mergeCorners(
      corner,
      Int32Array.from({ length: n }, (_, i) => i),
    );
    expect(position).toHaveLength(3 * n);
  });
});
