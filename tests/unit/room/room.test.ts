import { describe, expect, it } from 'vitest';
import { randomStream } from '../../../src/core/random.ts';
import { squaredDistanceBetweenSegments } from '../../../src/core/segments.ts';
import { Demand } from '../../../src/growth/demand.ts';
import { Grower } from '../../../src/growth/grower.ts';
import { Room } from '../../../src/room/room.ts';
import { specFromValue } from '../../../src/spec/parse.ts';
import { buildTissue } from '../../../src/tissue/build-tissue.ts';
import { createSites } from '../../../src/tissue/sites.ts';
import { ForestBuilder } from '../../../src/tree/builder.ts';

const TISSUE = buildTissue({ shape: 'box', min: [0, 0, 0], max: [1, 1, 1] }, new Map());
const LIMITS = { gap: 0.01, cosMinAngle: Math.cos(Math.PI / 6), cosMinBend: 0 };

/** Two trees of one vessel each: along x at y = 0.5 and at a height above it. */
function pair(height: number, radius: number) {
  const builder = new ForestBuilder(3);
  const rows = [0, 1].map((t) => {
    const y = 0.5;
    const z = 0.4 + t * height;
    builder.addRoot(0.1, y, z, radius);
    const row = builder.addChild(builder.roots[t]!, 0.9, y, z);
    builder.load[row] = 1;
    builder.weight[row] = 1;
    return row;
  });
  const room = new Room(builder, TISSUE, LIMITS, 0.2);
  room.begin();
  for (const row of rows) room.move(row);
  return { builder, room, rows };
}

describe('room', () => {
  it('certifies two vessels that keep the gap and refuses two that do not', () => {
    const apart = pair(0.0601 + 0.01, 0.03);
    expect(apart.rows.every((row) => apart.room.certify(row, 1))).toBe(true);
    const close = pair(0.0599 + 0.01, 0.03);
    expect(close.rows.every((row) => close.room.certify(row, 1))).toBe(false);
    expect(close.room.refusal).toBe('vessel');
  });

  it('refuses a vessel that leaves the tissue', () => {
    const { room, rows, builder } = pair(0.3, 0.03);
    builder.position[3 * rows[1]! + 2] = 0.98;
    expect(room.certify(rows[1]!, 1)).toBe(false);
    expect(room.refusal).toBe('tissue');
  });

  it('gives headroom as far as there is room, and takes it back for a neighbour that needs it', () => {
    const { room, rows } = pair(0.08, 0.03);
    expect(room.certify(rows[0]!, 1.5)).toBe(true);
    // 0.08 between axes, less the gap, less the neighbour's 0.03.
    expect(room.reserveOf(rows[0]!)).toBeCloseTo(0.08 - 0.01 - 0.03, 9);
    expect(room.certify(rows[1]!, 1)).toBe(true);
    expect(room.reserveOf(rows[0]!) + room.reserveOf(rows[1]!)).toBeLessThanOrEqual(0.08 - 0.01);
  });

  it('refuses an angle below the least and a tube shorter than its balls', () => {
    const build = (x: number, y: number) => {
      const builder = new ForestBuilder(3);
      builder.addRoot(0.1, 0.5, 0.5, 0.02);
      const trunk = builder.addChild(0, 0.5, 0.5, 0.5);
      const a = builder.addChild(trunk, 0.9, 0.5, 0.5);
      const b = builder.addChild(trunk, 0.5 + x, 0.5 + y, 0.5);
      for (const [row, load] of [
        [trunk, 2],
        [a, 1],
        [b, 1],
      ] as const) {
        builder.load[row] = load;
        builder.weight[row] = load;
      }
      const room = new Room(builder, TISSUE, LIMITS, 0.2);
      room.begin();
      for (const row of [trunk, a, b]) room.move(row);
      return room.fits(trunk);
    };
    expect(build(0.2, 0.2)).toBe(true);
    // 20° and 40° apart, with 30° the least.
    expect(build(0.3 * Math.cos(Math.PI / 9), 0.3 * Math.sin(Math.PI / 9))).toBe(false);
    expect(build(0.3 * Math.cos(Math.PI / 4.5), 0.3 * Math.sin(Math.PI / 4.5))).toBe(true);
    expect(build(0.02, 0.02)).toBe(false);
  });

  it('keeps reserves above radii and apart, whatever growth does (all pairs looked at)', () => {
    const spec = specFromValue({
      tissue: { shape: 'box', min_mm: [0, 0, 0], max_mm: [10, 10, 10] },
      trees: [{ inlet: { position_mm: [0, 5, 5], direction: [1, 0, 0], flow_mL_min: 1 }, terminals: { count: 300 } }],
      sizing: { rule: 'junction-exponent', inlet_radius_um: 700 },
      clearance: { gap_um: 10 },
    });
    const tissue = buildTissue(spec.tissue, new Map());
    const demand = new Demand('count', 300, createSites(tissue, randomStream('1', 'x')), null, null, 1.1e-4);
    const grower = new Grower(spec, tissue, [demand], null);
    expect(grower.grow()).toBe('complete');
    const { builder, room } = grower;
    const p = builder.position;
    let pairs = 0;
    for (let i = 0; i < builder.count; i++) {
      const a = builder.parent[i]!;
      if (a < 0) continue;
      expect(room.reserveOf(i)).toBeGreaterThanOrEqual(builder.radius(i) * (1 - 1e-12));
      for (let j = 0; j < i; j++) {
        const b = builder.parent[j]!;
        if (b < 0 || a === b || a === j || b === i) continue;
        const distance = Math.sqrt(
          squaredDistanceBetweenSegments(
            p[3 * a]!,
            p[3 * a + 1]!,
            p[3 * a + 2]!,
            p[3 * i]!,
            p[3 * i + 1]!,
            p[3 * i + 2]!,
            p[3 * b]!,
            p[3 * b + 1]!,
            p[3 * b + 2]!,
            p[3 * j]!,
            p[3 * j + 1]!,
            p[3 * j + 2]!,
          ),
        );
        pairs++;
        expect(distance - room.reserveOf(i) - room.reserveOf(j)).toBeGreaterThanOrEqual(10e-6 * (1 - 1e-9));
      }
    }
    expect(pairs).toBeGreaterThan(100_000);
  });
});
