import { describe, expect, it } from 'vitest';
import { Sweeper } from '../../../src/moves/sweeper.ts';
import type { ForestBuilder } from '../../../src/tree/builder.ts';
import { growCrowded } from '../../support/crowded-forest.ts';

/** Terminals on each row, by adding one to all that each terminal hangs on. */
function terminalsOf(builder: ForestBuilder): Int32Array {
  const carried = new Int32Array(builder.count);
  for (let row = 0; row < builder.count; row++) {
    if (builder.child[2 * row]! >= 0) continue;
    for (let at = row; at >= 0; at = builder.parent[at]!) carried[at]!++;
  }
  return carried;
}

describe('a sweep', () => {
  it.each([1, 2, 4, 9])('moves nodes that carry %i terminals or more, and no others', (least) => {
    const { grower } = growCrowded({ exponent: 3, crowding: '5 %', terminals: 70 });
    const { builder, room } = grower;
    room.settle();
    const carried = terminalsOf(builder);
    const before = builder.position.slice(0, 3 * builder.count);
    new Sweeper(builder, room, null, 1, 0).sweep(null, least);
    const moved = Array.from({ length: builder.count }, (_, row) => row).filter(
      (row) =>
        builder.parent[row]! >= 0 && [0, 1, 2].some((k) => builder.position[3 * row + k] !== before[3 * row + k]),
    );
    expect(moved.length).toBeGreaterThan(0);
    const fewest = Math.min(...moved.map((row) => carried[row]!));
    expect(fewest).toBeGreaterThanOrEqual(least);
    // Each of these classes has nodes that gain by moving.
    expect(fewest).toBeLessThan(least + 4);
  });
});
