import { describe, expect, it } from 'vitest';
import { quantityOf } from '../../../viewer/quantities.ts';
import { countShown, fillValues, MARK, markWay, packScene, ROW_VESSELS, setTaper } from '../../../viewer/scene.ts';
import { planeOf } from '../../../viewer/section.ts';
import { buildViewerTree, twoFacingTrees } from '../../support/viewer-tree.ts';

const record = twoFacingTrees();
const { forest } = record;

/** Rows that are tubes, in order: what vessel numbers count. */
const tubes = Array.from({ length: forest.count }, (_, row) => row).filter((row) => forest.parent[row]! >= 0);

describe('packScene', () => {
  const scene = packScene(record);

  it('draws every vessel once, numbered as in every file', () => {
    // Two trees of 2^8 − 1 vessels.
    expect(scene.count).toBe(2 * (2 ** 8 - 1));
    expect([...scene.rowOf]).toEqual(tubes);
    tubes.forEach((row, vessel) => {
      expect(vessel).toBe(row - forest.tree[row]! - 1);
      expect(scene.vesselOf[row]).toBe(vessel);
    });
    expect(scene.vesselOf[0]).toBe(-1);
  });

  it('keeps ends and radii to float32 of the scene, all inside the unit ball', () => {
    for (let vessel = 0; vessel < scene.count; vessel++) {
      const row = scene.rowOf[vessel]!;
      [forest.parent[row]!, row].forEach((node, end) => {
        const at = 8 * vessel + 4 * end;
        for (let k = 0; k < 3; k++) {
          const metres = scene.ends[at + k]! / scene.scale + scene.centre[k]!;
          expect(Math.abs(metres - forest.position[3 * node + k]!)).toBeLessThan(2 ** -24 / scene.scale);
        }
        expect(scene.ends[at + 3]! / scene.scale / forest.radius[row]!).toBeCloseTo(1, 6);
        const reach = Math.hypot(scene.ends[at]!, scene.ends[at + 1]!, scene.ends[at + 2]!) + scene.ends[at + 3]!;
        expect(reach).toBeLessThanOrEqual(1 + 1e-6);
      });
    }
  });

  it('marks draining vessels and keeps orders', () => {
    for (let vessel = 0; vessel < scene.count; vessel++) {
      const row = scene.rowOf[vessel]!;
      expect(scene.marks[2 * vessel]).toBe(forest.tree[row] === 1 ? MARK.drain : 0);
      expect(scene.marks[2 * vessel + 1]).toBe(record.order[row]);
    }
    expect(scene.highestOrder).toBe(8);
  });

  it('pads to whole texture rows', () => {
    expect(scene.rows).toBe(1);
    expect(scene.ends.length).toBe(8 * ROW_VESSELS);
    const large = packScene(
      buildViewerTree([{ name: 'a', kind: 'supply', root: [0, 0, 0], side: 1, levels: 11 }], false),
    );
    expect(large.count).toBe(2 ** 12 - 1);
    expect(large.rows).toBe(Math.ceil((2 ** 12 - 1) / ROW_VESSELS));
    expect(large.marks.length).toBe(2 * large.rows * ROW_VESSELS);
  });
});

describe('fillValues', () => {
  it('gives a node quantity at both ends, continuous over junctions', () => {
    const scene = packScene(record);
    const pressure = record.field!.pressure;
    fillValues(scene, quantityOf('pressure'), pressure, 8000);
    for (let vessel = 0; vessel < scene.count; vessel++) {
      const row = scene.rowOf[vessel]!;
      expect(scene.values[2 * vessel]).toBe(Math.fround(pressure[forest.parent[row]!]! / 8000));
      expect(scene.values[2 * vessel + 1]).toBe(Math.fround(pressure[row]! / 8000));
    }
  });

  it('gives a tube quantity the same at both ends', () => {
    const scene = packScene(record);
    fillValues(scene, quantityOf('flow'), forest.flow, 2e-8);
    for (let vessel = 0; vessel < scene.count; vessel++) {
      expect(scene.values[2 * vessel]).toBe(scene.values[2 * vessel + 1]);
      expect(scene.values[2 * vessel]).toBe(Math.fround(forest.flow[scene.rowOf[vessel]!]! / 2e-8));
    }
  });
});

describe('hiding and marking', () => {
  it('counts what passes both limits', () => {
    const scene = packScene(record);
    expect(countShown(scene, { thinnest: 0, lowestOrder: 1 })).toBe(scene.count);
    for (const thinnest of [forest.radius[tubes[40]!]!, forest.radius[tubes[3]!]!, 1]) {
      for (const lowestOrder of [1, 2, 5]) {
        const wanted = tubes.filter((row) => forest.radius[row]! >= thinnest && record.order[row]! >= lowestOrder);
        expect(countShown(scene, { thinnest, lowestOrder })).toBe(wanted.length);
      }
    }
  });

  it('marks a way, and takes the marks back without losing the kind', () => {
    const scene = packScene(record);
    const before = scene.marks.slice();
    markWay(scene, 300, [300, 256, 255]);
    expect(scene.marks[600]).toBe(MARK.drain | MARK.way | MARK.chosen);
    expect(scene.marks[512]).toBe(MARK.drain | MARK.way);
    markWay(scene, -1, []);
    expect(scene.marks).toEqual(before);
  });

  it('tapers only the near end, never past the parent or 1.26 of its own radius', () => {
    const scene = packScene(record);
    const straight = scene.ends.slice();
    setTaper(scene, true);
    let wider = 0;
    for (let vessel = 0; vessel < scene.count; vessel++) {
      const row = scene.rowOf[vessel]!;
      const own = forest.radius[row]!;
      const start = scene.ends[8 * vessel + 3]! / scene.scale;
      expect(scene.ends[8 * vessel + 7]).toBe(straight[8 * vessel + 7]);
      expect(start).toBeLessThanOrEqual(
        Math.max(own, Math.min(forest.radius[forest.parent[row]!]!, 1.26 * own)) * (1 + 1e-6),
      );
      if (start > 1.1 * own) wider++;
    }
    expect(wider).toBeGreaterThan(scene.count / 2);
    setTaper(scene, false);
    expect(scene.ends).toEqual(straight);
  });
});

describe('planeOf', () => {
  it('puts the plane where it was asked for and keeps the asked side', () => {
    const scene = packScene(record);
    for (const axis of [0, 1, 2] as const) {
      for (const flip of [false, true]) {
        const offset = 0.3 * scene.low[axis]! + 0.7 * scene.high[axis]!;
        const [nx, ny, nz, d] = planeOf(scene, { on: true, axis, offset, flip });
        for (const row of tubes) {
          const p = [0, 1, 2].map((k) => (forest.position[3 * row + k]! - scene.centre[k]!) * scene.scale);
          const kept = nx * p[0]! + ny * p[1]! + nz * p[2]! <= d;
          expect(kept).toBe(
            flip ? forest.position[3 * row + axis]! >= offset : forest.position[3 * row + axis]! <= offset,
          );
        }
      }
    }
  });

  it('keeps everything when off', () => {
    const scene = packScene(record);
    expect(planeOf(scene, { on: false, axis: 0, offset: 0, flip: false })).toEqual([0, 0, 0, 1]);
  });
});
