import { describe, expect, it } from 'vitest';
import { randomStream } from '../../../src/core/random.ts';
import { Attacher } from '../../../src/moves/attach.ts';
import { CHUNK, type ProposalTask } from '../../../src/moves/crew.ts';
import { Desk } from '../../../src/moves/desk.ts';
import { proposeAll } from '../../../src/moves/propose-all.ts';
import { buildTissue } from '../../../src/tissue/build-tissue.ts';
import { type CrowdedOptions, growCrowded } from '../../support/crowded-forest.ts';
import { judgeForest } from '../../support/forest-judge.ts';
import { columnsOf, plainForest, sameColumns } from '../../support/plain-forest.ts';
import { judgeReserves } from '../../support/watched-moves.ts';

const OPTIONS = { first: 8, second: 24, keep: 4, slimmest: 1, headroom: 1.03, slack: 1.2 };
const CASES: readonly (readonly [CrowdedOptions['exponent'], CrowdedOptions['crowding']])[] = [
  ['least-power', '5 %'],
  ['least-power', '10 %'],
  [2.6, '5 %'],
  [2.6, '10 %'],
  [3, 'hair-thin'],
];

/** A crowded forest, somebody who hangs more terminals on it, and sites for them. */
function stage(exponent: CrowdedOptions['exponent'], crowding: CrowdedOptions['crowding']) {
  const { grower, spec } = growCrowded({ exponent, crowding, terminals: 80 });
  const { builder, room } = grower;
  const attacher = new Attacher(builder, room, OPTIONS, (_row, _along, _length, share) => share);
  const refresh = () => {
    for (let t = 0; t < 2; t++) attacher.refreshPotential(builder.preorder(t), 1);
  };
  refresh();
  const random = randomStream('sites', `${exponent} ${crowding}`);
  const sites = Array.from({ length: 200 }, (_, k) => ({
    tree: k % 2,
    x: 0.01 * random.next(),
    y: 0.01 * random.next(),
    z: 0.01 * random.next(),
    share: 0.3 + 3 * random.next(),
  }));
  return { builder, room, spec, attacher, refresh, sites };
}

describe.each(CASES)('hanging terminals, %s, %s', (exponent, crowding) => {
  it.each(['straight', 'bent'] as const)('%s: each fits at once, or all is as it was', (kind) => {
    const { builder, room, attacher, refresh, sites } = stage(exponent, crowding);
    let served = 0;
    let refused = 0;
    let columns = columnsOf(builder);
    for (const { tree, x, y, z, share } of sites.slice(0, 80)) {
      const first = builder.child[2 * builder.roots[tree]!]!;
      const whole = plainForest(builder).load[first]!;
      const row =
        kind === 'straight' ? attacher.attach(tree, x, y, z, share) : attacher.attachBent(tree, x, y, z, share);
      const after = columnsOf(builder);
      if (row < 0) {
        refused++;
        expect(sameColumns(after, columns)).toBe(true);
        continue;
      }
      served++;
      columns = after;
      expect([...builder.position.slice(3 * row, 3 * row + 3), builder.load[row]]).toEqual([x, y, z, share]);
      expect(builder.tree[row]).toBe(tree);
      expect(plainForest(builder).load[first]).toBeCloseTo(whole + share, 9);
      if (kind === 'bent') expect(builder.childCount(builder.parent[row]!)).toBe(1);
      expect(judgeForest(room)).toEqual([]);
      refresh();
    }
    expect(served).toBeGreaterThan(5);
    if (crowding !== 'hair-thin') expect(refused).toBeGreaterThan(0);
    expect(judgeReserves(room)).toEqual([]);
  });

  it('proposing changes nothing, and a reader in another place proposes the same', () => {
    const { builder, room, spec, attacher, sites } = stage(exponent, crowding);
    const desk = new Desk(buildTissue(spec.tissue, new Map()));
    const count = sites.length;
    const keep = OPTIONS.keep;
    const batch = () => ({
      count,
      keep,
      order: Int32Array.from(sites, (_, k) => count - 1 - k),
      tree: Int32Array.from(sites, (site) => site.tree),
      share: Float64Array.from(sites, (site) => site.share),
      position: Float64Array.from(sites.flatMap(({ x, y, z }) => [x, y, z])),
      proposed: new Int32Array(count),
      row: new Int32Array(count * keep),
      at: new Float64Array(3 * count * keep),
    });
    let proposed = 0;
    // Between looks the forest grows and its columns are replaced, as in growth.
    for (let round = 0; round < 4; round++) {
      room.begin();
      const before = JSON.stringify([
        [...columnsOf(builder)],
        [...room.view().reserve],
        [...attacher.potential.values],
      ]);
      const mine = batch();
      proposeAll(attacher.proposer, mine, 0, count);
      const theirs = batch();
      const task: ProposalTask = {
        options: OPTIONS,
        limits: room.limits,
        builder: builder.view(),
        room: room.view(),
        potential: attacher.potential.values,
        work: { sites: theirs },
      };
      desk.open(task);
      // Chunk by chunk, the last first.
      for (let chunk = Math.ceil(count / CHUNK) - 1; chunk >= 0; chunk--)
        desk.propose(chunk * CHUNK, Math.min(count, (chunk + 1) * CHUNK));
      expect(theirs).toEqual(mine);
      expect(
        JSON.stringify([[...columnsOf(builder)], [...room.view().reserve], [...attacher.potential.values]]) === before,
      ).toBe(true);
      for (const n of mine.proposed) proposed += n;
      for (const { tree, x, y, z, share } of sites.slice(20 * round, 20 * round + 20))
        attacher.attach(tree, x, y, z, share);
      if (round === 1) room.rebuild(0.5 * room.cell);
    }
    expect(proposed).toBeGreaterThan(200);
  });
});
