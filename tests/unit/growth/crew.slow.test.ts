import { describe, expect, it } from 'vitest';
import { randomStream } from '../../../src/core/random.ts';
import { Demand } from '../../../src/growth/demand.ts';
import { freezeGrowth } from '../../../src/growth/freeze.ts';
import { Grower } from '../../../src/growth/grower.ts';
import { CHUNK, type Crew } from '../../../src/moves/crew.ts';
import { Desk } from '../../../src/moves/desk.ts';
import { specFromValue } from '../../../src/spec/parse.ts';
import { buildTissue } from '../../../src/tissue/build-tissue.ts';
import type { Forest } from '../../../src/tree/forest.ts';

/* A crew that works in one thread, so that a test decides who looks at what. */

const RADII = [15, 12, 10] as const;
const COUNT = 30_000;
// Crowded, with terminals of very unequal shares: many sites are refused, and reserves are cut back often.
const SPEC = specFromValue({
  name: 'crew',
  tissue: { shape: 'ellipsoid', center_mm: [0, 0, 0], radii_mm: RADII },
  trees: [{ inlet: { position_mm: [-15, 0, 0], direction: [1, 0, 0], flow_mL_min: 10 }, terminals: { count: COUNT } }],
  sizing: { rule: 'junction-exponent', junction_exponent: 3, inlet_radius_um: 1100 },
  clearance: { gap_um: 0 },
  refine: 'none',
});

function sites(): { at: number[]; share: number[] } {
  const random = randomStream('points', 'crew');
  const at: number[] = [];
  while (at.length < 3 * COUNT) {
    const point = RADII.map((radius) => 0.97 * radius * (2 * random.next() - 1));
    if (point.reduce((sum, x, k) => sum + (x * x) / (RADII[k]! * RADII[k]!), 0) < 0.94)
      at.push(...point.map((x) => 1e-3 * x));
  }
  return { at, share: Array.from({ length: COUNT }, () => 0.2 + 3 * random.next()) };
}

function grow(crew?: (grower: () => Grower) => Crew): Forest {
  const { at, share } = sites();
  const demand = new Demand('points', COUNT, null, at, share, 0);
  const tissue = buildTissue(SPEC.tissue, new Map());
  const grower: Grower = new Grower(SPEC, tissue, [demand], null, { crew: crew?.(() => grower) });
  grower.grow();
  return freezeGrowth(grower, SPEC);
}

describe('a crew', () => {
  it('sees what the grower sees and proposes what it would, whoever takes which chunk', () => {
    const alone = grow();
    const lot = randomStream('who', 'lot');
    const desks = [0, 1].map(() => new Desk(buildTissue(SPEC.tissue, new Map())));
    let chunks = 0;
    const tasks = { sites: 0, moves: 0 };
    const shared = grow((grower) => ({
      memory: (bytes) => new SharedArrayBuffer(bytes),
      work(task, count, mine) {
        const { room, builder } = grower();
        tasks['sites' in task.work ? 'sites' : 'moves']++;
        let seen = 0;
        for (let row = 0; row < builder.count; row++) if (task.room.reserve[row] === room.reserveOf(row)) seen++;
        expect(seen, 'a change that was tried is still open').toBe(builder.count);
        for (const desk of desks) desk.open(task);
        const order = Array.from({ length: Math.ceil(count / CHUNK) }, (_, k) => k);
        while (order.length > 0) {
          const [chunk] = order.splice(Math.floor(lot.next() * order.length), 1);
          const from = chunk! * CHUNK;
          const end = Math.min(count, from + CHUNK);
          const who = Math.floor(3 * lot.next());
          if (who === 2) mine(from, end);
          else desks[who]!.propose(from, end);
          chunks++;
        }
      },
    }));
    expect(chunks).toBeGreaterThan(20);
    expect(tasks.sites).toBeGreaterThan(20);
    expect(tasks.moves).toBeGreaterThan(0);
    expect(shared.count).toBe(alone.count);
    for (const column of ['parent', 'position', 'flow', 'radius'] as const)
      expect(Buffer.compare(bytesOf(shared[column]), bytesOf(alone[column])), column).toBe(0);
  });
});

function bytesOf(column: unknown): Uint8Array {
  const { buffer, byteOffset, byteLength } = column as Float64Array;
  return new Uint8Array(buffer, byteOffset, byteLength);
}
