import { describe, expect, it } from 'vitest';
import { randomStream } from '../../../src/core/random.ts';
import { Exchanger } from '../../../src/moves/exchange.ts';
import { NodeMover } from '../../../src/moves/move-node.ts';
import { Potential } from '../../../src/moves/potential.ts';
import { Rehanger } from '../../../src/moves/rehang.ts';
import { powerOfLoad, tubeWeights } from '../../../src/refine/cost.ts';
import { growCrowded } from '../../support/crowded-forest.ts';
import { judgeForest } from '../../support/forest-judge.ts';
import { columnsOf, sameColumns } from '../../support/plain-forest.ts';
import { judgeReserves, type Watched, watchMoves } from '../../support/watched-moves.ts';

/*
 * Every move of refinement on small crowded forests, each held to the plain cost of the whole forest and to a judge that
 * looks at all pairs. Source of both: common practice, no source.
 */

const CASES = [
  ['least-power', '5 %'],
  ['least-power', '10 %'],
  [2.6, 'hair-thin'],
  [2.6, '10 %'],
  [3, '5 %'],
] as const;

/** Moves of a kind until enough of them were made. */
const ENOUGH = 25;

function stage(exponent: (typeof CASES)[number][0], crowding: (typeof CASES)[number][1]) {
  const { grower, spec } = growCrowded({ exponent, crowding, terminals: 70 });
  const { builder, room } = grower;
  room.settle();
  const rows = Array.from({ length: builder.count }, (_, row) => row).filter((row) => builder.parent[row]! >= 0);
  return { builder, room, spec, rows, perLength: powerOfLoad(builder, spec) };
}

function expectHeld(watched: Watched, least: number): void {
  expect(watched.faults).toEqual([]);
  expect(watched.accepted).toBeGreaterThanOrEqual(least);
  expect(watched.refused).toBeGreaterThan(0);
}

describe.each(CASES)('%s, %s', (exponent, crowding) => {
  it.each([
    ['where it costs less', 1],
    ['with room left for growth', 1.2],
  ] as const)('a node moved %s', (_, slack) => {
    const { builder, room, spec, rows } = stage(exponent, crowding);
    const mover = new NodeMover(builder, room, slack);
    const weight = tubeWeights(builder, spec);
    let moved = 0;
    const watched = watchMoves(room, spec, rows.length, (k) => {
      if (moved >= ENOUGH || !mover.move(rows[k]!, (row) => weight[row]!, 0)) return 0;
      moved++;
      return 'saved';
    });
    expectHeld(watched, 15);
    expect(judgeReserves(room)).toEqual([]);
  });

  it('a node put anywhere', () => {
    const { builder, room, rows } = stage(exponent, crowding);
    const mover = new NodeMover(builder, room);
    const random = randomStream('anywhere', String(exponent));
    const faults: string[] = [];
    let put = 0;
    let columns = columnsOf(builder);
    for (let k = 0; k < 6 * rows.length && put < ENOUGH && faults.length === 0; k++) {
      const row = rows[k % rows.length]!;
      if (builder.childCount(row) === 0 || room.pinned.has(row)) continue;
      const place = [0, 1, 2].map((i) => builder.position[3 * row + i]! + 4e-3 * (random.next() - 0.5));
      if (mover.put(row, ...(place as [number, number, number]))) {
        put++;
        columns = columnsOf(builder);
        faults.push(...judgeForest(room));
      } else if (!sameColumns(columnsOf(builder), columns)) faults.push(`refused at row ${row}, but changed`);
    }
    expect(faults).toEqual([]);
    expect(put).toBe(ENOUGH);
    expect(judgeReserves(room)).toEqual([]);
  });

  it('a subtree hung elsewhere, for a gain and for a loss that is allowed', () => {
    const { builder, room, spec, rows, perLength } = stage(exponent, crowding);
    const potential = new Potential(builder, undefined, perLength);
    const rehanger = new Rehanger(builder, room, potential, perLength);
    const random = randomStream('rehang', String(exponent));
    let hung = 0;
    let losses = 0;
    const cost = watchMoves(room, spec, 0, () => 0).cost;
    const watched = watchMoves(room, spec, 3 * rows.length, (k) => {
      if (k % rows.length === 0) for (let t = 0; t < 2; t++) potential.refresh(builder.preorder(t), 1);
      const row = rows[k % rows.length]!;
      // Rows that an earlier move has given back are nobody's; half of the tries may cost something.
      if (hung >= ENOUGH || builder.parent[row]! < 0) return 0;
      const gain = rehanger.rehang(row, 1e-6, k % 2 === 0 ? 0 : (1e-3 * random.next() * cost) / rows.length);
      if (gain !== 0) hung++;
      if (gain < 0) losses++;
      if (k % 2 === 0) expect(gain).toBeGreaterThanOrEqual(0);
      return gain;
    });
    expectHeld(watched, 10);
    expect(losses).toBeLessThan(watched.accepted);
    expect(judgeReserves(room)).toEqual([]);
  });

  it('two subtrees exchanged', () => {
    const { builder, room, spec, rows, perLength } = stage(exponent, crowding);
    // Growth leaves few exchanges that gain: junctions shifted to and fro make some.
    const exchanger = new Exchanger(builder, room, perLength);
    const random = randomStream('exchange', String(exponent));
    const p = builder.position;
    for (let round = 0; round < 3; round++) {
      for (const row of rows) {
        if (builder.childCount(row) !== 2 || room.pinned.has(row)) continue;
        const home = p.slice(3 * row, 3 * row + 3);
        for (let k = 0; k < 3; k++) p[3 * row + k]! += 3e-3 * (random.next() - 0.5);
        room.begin();
        const tubes = [row, builder.child[2 * row]!, builder.child[2 * row + 1]!];
        for (const tube of tubes) room.move(tube);
        if (
          [...tubes, builder.parent[row]!].every((node) => room.fits(node)) &&
          tubes.every((tube) => room.certify(tube, 1))
        )
          room.commit();
        else p.set(home, 3 * row);
      }
    }
    let exchanged = 0;
    const watched = watchMoves(room, spec, 4 * rows.length, (k) => {
      if (exchanged >= ENOUGH) return 0;
      const gain = exchanger.exchange(rows[k % rows.length]!, 1e-6);
      if (gain !== 0) exchanged++;
      return gain;
    });
    expectHeld(watched, 3);
    expect(judgeReserves(room)).toEqual([]);
  });
});
