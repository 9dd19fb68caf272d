import { describe, expect, it } from 'vitest';
import { randomStream } from '../../../src/core/random.ts';
import { straighten } from '../../../src/moves/straighten.ts';
import { growCrowded } from '../../support/crowded-forest.ts';
import { judgeReserves, watchMoves } from '../../support/watched-moves.ts';

/** A crowded forest with as many bends as fit, put into every tube at random. */
function bent(exponent: 'least-power' | 2.6, seed: string) {
  const { grower, spec } = growCrowded({ exponent, crowding: '10 %', terminals: 70 });
  const { builder, room } = grower;
  room.settle();
  const random = randomStream(seed, 'bends');
  const bends: number[] = [];
  const p = builder.position;
  for (let row = 0, end = builder.count; row < end; row++) {
    const above = builder.parent[row]!;
    if (above < 0 || room.pinned.has(row)) continue;
    for (let tries = 0; tries < 20; tries++) {
      const size = 0.5 * Math.hypot(...[0, 1, 2].map((k) => p[3 * row + k]! - p[3 * above + k]!));
      const place = [0, 1, 2].map(
        (k) => 0.5 * (p[3 * row + k]! + p[3 * above + k]!) + size * (2 * random.next() - 1),
      ) as [number, number, number];
      const bend = builder.insertAbove(row, ...place);
      room.begin();
      room.move(bend);
      room.move(row);
      const nodes = [above, bend, row];
      if (nodes.every((node) => room.fits(node)) && room.certify(bend, 1) && room.certify(row, 1)) {
        room.commit();
        bends.push(bend);
        break;
      }
      builder.spliceOut(bend);
    }
  }
  room.begin();
  return { builder, room, spec, bends };
}

describe.each(['least-power', 2.6] as const)('straightening, %s', (exponent) => {
  it('takes bends out where the straight vessel fits and leaves all as it was where not', () => {
    const { builder, room, spec, bends } = bent(exponent, 'plain');
    expect(bends.length).toBeGreaterThan(40);
    const watched = watchMoves(room, spec, bends.length, (k) => (straighten(builder, room, bends[k]!) ? 'saved' : 0));
    expect(watched.faults).toEqual([]);
    expect(watched.accepted).toBeGreaterThan(20);
    expect(judgeReserves(room)).toEqual([]);
  });

  it('certifies no vessel for more than there is room for when it is refused while others are to leave room', () => {
    const { builder, room, spec, bends } = bent(exponent, 'slack');
    room.slack = 1.6;
    const watched = watchMoves(room, spec, bends.length, (k) => (straighten(builder, room, bends[k]!) ? 'saved' : 0));
    room.slack = 1;
    expect(watched.faults).toEqual([]);
    expect(watched.refused).toBeGreaterThan(5);
    expect(judgeReserves(room)).toEqual([]);
  });
});
