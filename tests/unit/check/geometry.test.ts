import { describe, expect, test } from 'vitest';
import { nodeToSegment, segmentToSegment } from '../../../src/check/axis-distance.ts';
import {
  buildBoxTree,
  FAN,
  nearestSquaredDistance,
  traversalStack,
  visitNearLeaves,
  visitOverlaps,
} from '../../../src/check/box-tree.ts';
import { checkTree } from '../../../src/check/check-tree.ts';
import { measureClearance } from '../../../src/check/clearance.ts';
import { junctionReach } from '../../../src/check/junctions.ts';
import { Tally } from '../../../src/check/result.ts';
import { randomStream } from '../../../src/core/random.ts';
import { squaredDistanceBetweenSegments } from '../../../src/core/segments.ts';
import { solveRecord } from '../../../src/run.ts';
import type { Forest } from '../../../src/tree/forest.ts';
import { bisectBox } from '../../support/bisected-tree.ts';

describe('segment distance', () => {
  test('by hand', () => {
    const at = (...points: number[]) => segmentToSegment(points, 0, 1, 2, 3);
    expect(at(0, 0, 0, 2, 0, 0, 1, -1, 3, 1, 1, 3)).toBe(3); // crossing in projection
    expect(at(0, 0, 0, 1, 0, 0, 4, 4, 0, 4, 8, 0)).toBe(5); // end to end
    expect(at(0, 0, 0, 4, 0, 0, 1, 2, 0, 3, 2, 0)).toBe(2); // parallel
    expect(at(0, 0, 0, 0, 0, 0, 3, 4, 0, 3, 4, 0)).toBe(5); // two points
    expect(nodeToSegment([0, 0, 0, 4, 0, 0, 2, 3, 0], 2, 0, 1)).toBe(3);
  });

  test('agrees with the clamping method on random segments', () => {
    const random = randomStream('1', 'segments');
    for (let k = 0; k < 5000; k++) {
      const p = Array.from({ length: 12 }, () => (k % 3 === 0 ? Math.round(4 * random.next()) : random.next()));
      const wanted = squaredDistanceBetweenSegments(
        ...(p as unknown as Parameters<typeof squaredDistanceBetweenSegments>),
      );
      expect(segmentToSegment(p, 0, 1, 2, 3)).toBeCloseTo(Math.sqrt(wanted), 9);
    }
  });
});

describe('box tree', () => {
  const random = randomStream('1', 'boxes');
  const n = 700;
  const boxes = new Float64Array(6 * n);
  for (let i = 0; i < n; i++) {
    for (let k = 0; k < 3; k++) {
      const low = random.next();
      boxes[6 * i + k] = low;
      boxes[6 * i + k + 3] = low + 0.2 * random.next() * random.next();
    }
  }
  const tree = buildBoxTree(n, (item, out) => out.set(boxes.subarray(6 * item, 6 * item + 6)));

  test('hands out every box that overlaps, from the asked slot on', () => {
    const slotOf = new Int32Array(n);
    tree.item.forEach((item, slot) => {
      slotOf[item] = slot;
    });
    for (let q = 0; q < 100; q++) {
      const query = boxes.slice(6 * q, 6 * q + 6);
      const first = q % 2 === 0 ? 0 : slotOf[q]! + 1;
      const seen = new Set<number>();
      visitOverlaps(tree, query, first, traversalStack(), (slot) => {
        expect(slot).toBeGreaterThanOrEqual(first);
        seen.add(tree.item[slot]!);
      });
      for (let i = 0; i < n; i++) {
        const meets = [0, 1, 2].every((k) => boxes[6 * i + k]! <= query[k + 3]! && boxes[6 * i + k + 3]! >= query[k]!);
        if (meets && slotOf[i]! >= first) expect(seen.has(i)).toBe(true);
      }
    }
  });

  test('finds the nearest', () => {
    for (let q = 0; q < 100; q++) {
      const [x, y, z] = [random.next() * 2, random.next(), random.next()];
      const to = (i: number) => {
        let sum = 0;
        for (const [k, p] of [x, y, z].entries()) {
          const d = Math.max(boxes[6 * i + k]! - p, 0, p - boxes[6 * i + k + 3]!);
          sum += d * d;
        }
        return sum;
      };
      let wanted = Infinity;
      for (let i = 0; i < n; i++) wanted = Math.min(wanted, to(i));
      expect(nearestSquaredDistance(tree, x, y, z, traversalStack(), to)).toBe(wanted);
    }
  });

  test('keeps boxes by slot, rounded outwards by no more than float32 needs', () => {
    const slotBox = new Float32Array(6 * n);
    const { item } = buildBoxTree(n, (i, out) => out.set(boxes.subarray(6 * i, 6 * i + 6)), slotBox);
    for (let slot = 0; slot < n; slot++) {
      for (let k = 0; k < 3; k++) {
        const [low, high] = [boxes[6 * item[slot]! + k]!, boxes[6 * item[slot]! + k + 3]!];
        expect(slotBox[6 * slot + k]).toBeLessThanOrEqual(low);
        expect(slotBox[6 * slot + k]).toBeGreaterThan(low - 1e-6);
        expect(slotBox[6 * slot + k + 3]).toBeGreaterThanOrEqual(high);
        expect(slotBox[6 * slot + k + 3]).toBeLessThan(high + 1e-6);
      }
    }
  });

  test.each([0, 0.03, 10])('visits every two leaves that come within %d, once', (margin) => {
    const seen = new Set<number>();
    const leaves = Math.ceil(n / FAN);
    visitNearLeaves(tree, { margin }, (a, b) => {
      expect(a).toBeLessThanOrEqual(b);
      expect(seen.has(leaves * a + b)).toBe(false);
      seen.add(leaves * a + b);
    });
    for (let p = 0; p < n; p++) {
      for (let q = p; q < n; q++) {
        const [i, j] = [6 * tree.item[p]!, 6 * tree.item[q]!];
        const near = [0, 1, 2].every(
          (k) => boxes[i + k]! <= boxes[j + k + 3]! + margin && boxes[i + k + 3]! >= boxes[j + k]! - margin,
        );
        if (near) expect(seen.has(leaves * Math.floor(p / FAN) + Math.floor(q / FAN))).toBe(true);
      }
    }
    // Not all by all, unless the margin spans the whole.
    const all = (leaves * (leaves + 1)) / 2;
    if (margin === 10) expect(seen.size).toBe(all);
    else expect(seen.size).toBeLessThan(0.8 * all);
  });

  test('visits what a margin that is lowered on the way leaves', () => {
    const reach = { margin: 10 };
    let visits = 0;
    visitNearLeaves(tree, reach, () => {
      visits++;
      reach.margin = 0;
    });
    let few = 0;
    visitNearLeaves(tree, { margin: 0 }, () => few++);
    expect(visits).toBeGreaterThanOrEqual(few);
    expect(visits).toBeLessThan(few + 200);
  });

  test('of nothing, and of one', () => {
    const empty = buildBoxTree(0, () => {});
    expect(nearestSquaredDistance(empty, 0, 0, 0, traversalStack(), () => 0)).toBe(Infinity);
    visitNearLeaves(empty, { margin: 1 }, () => expect.unreachable());
    const one = buildBoxTree(1, (_, out) => out.fill(2));
    const pairs: number[][] = [];
    visitNearLeaves(one, { margin: 1 }, (a, b) => pairs.push([a, b]));
    expect(pairs).toEqual([[0, 0]]);
    expect(nearestSquaredDistance(one, 0, 0, 0, traversalStack(), () => 12)).toBe(12);
  });
});

describe('clearance', () => {
  // Radii over three decades, every pair tried.
  test.each(['1', '2', '3'])('finds the pairs that all-pairs finds, seed %s', (seed) => {
    const random = randomStream(seed, 'clearance');
    const n = 400;
    const parent = new Int32Array(n).fill(-1);
    const position = new Float64Array(3 * n);
    const radius = new Float64Array(n);
    for (let i = 0; i < n; i++) {
      if (i > 0) parent[i] = Math.floor(i * random.next());
      const reach = i === 0 ? 1 : 0.3 * Math.exp(-3 * random.next());
      for (let k = 0; k < 3; k++) {
        const from = i === 0 ? 0.5 : position[3 * parent[i]! + k]!;
        position[3 * i + k] = from + reach * (random.next() - 0.5);
      }
      radius[i] = 0.03 * Math.exp(-7 * random.next());
    }
    const forest: Forest = {
      count: n,
      treeStart: Int32Array.from([0, n]),
      tree: new Int32Array(n),
      parent,
      position,
      radius,
      flow: radius,
    };
    const gap = 0.002;
    const wanted: string[] = [];
    let closest = Infinity;
    for (let i = 1; i < n; i++) {
      for (let j = i + 1; j < n; j++) {
        if (parent[i] === parent[j] || parent[i] === j || parent[j] === i) continue;
        const d = segmentToSegment(position, parent[i]!, i, parent[j]!, j) - radius[i]! - radius[j]!;
        closest = Math.min(closest, d);
        if (d < gap) wanted.push(`${i}-${j}`);
      }
    }
    expect(wanted.length).toBeGreaterThan(20);
    const tally = new Tally({
      id: 'clearance',
      title: '',
      sense: 'at-least',
      limit: gap,
      unit: 'm',
      nameOf: String,
      describe: () => '',
      cap: 1e6,
    });
    expect(measureClearance(forest, gap, 1, tally)).toBe(true);
    expect(tally.worst).toBe(closest);
    expect(tally.findings.map((finding) => `${finding.vessel}-${finding.other}`).sort()).toEqual(wanted.sort());
  });
});

describe('a tree that was never grown', () => {
  const { forest, spec } = bisectBox(5000);

  test('keeps every promise, as it is made to', () => {
    const { promises } = checkTree(solveRecord(forest, spec), spec, new Map());
    expect(promises.filter(({ held }) => held === false)).toEqual([]);
    expect(promises.filter(({ held }) => held === true).length).toBeGreaterThanOrEqual(18);
  });

  test('with radii of another unit is told to be broken, and not looked at for ever', () => {
    const wide = { ...forest, radius: forest.radius.map((r) => 1000 * r) };
    const { promises } = checkTree(solveRecord(wide, spec), spec, new Map());
    const clearance = promises.find(({ id }) => id === 'clearance')!;
    expect(clearance.held).toBe(false);
    expect(clearance.note).toMatch(/^broken off/);
    // All pairs are some fifty million.
    expect(clearance.checked).toBeLessThan(3e6);
  });
});

describe('ball round a junction', () => {
  // asin(a/ρ) + asin(b/ρ) = θ, solved by halving.
  test.each([
    [1, 1, 60],
    [1, 0.5, 45],
    [0.3, 1, 90],
    [1, 0.9, 120],
    [1, 0.5, 119],
    [2, 1.9, 150],
  ])('radii %d and %d at %d°', (a, b, degrees) => {
    const angle = (degrees * Math.PI) / 180;
    let low = Math.max(a, b);
    let high = 1e3;
    for (let k = 0; k < 200; k++) {
      const middle = 0.5 * (low + high);
      if (Math.asin(a / middle) + Math.asin(b / middle) > angle) low = middle;
      else high = middle;
    }
    expect(junctionReach(a, b, angle)).toBeCloseTo(low, 9);
    expect(junctionReach(b, a, angle)).toBe(junctionReach(a, b, angle));
  });

  test('the thicker radius where the thinner tube is beyond its great circle', () => {
    expect(junctionReach(1, 0.5, (121 * Math.PI) / 180)).toBe(1);
    expect(junctionReach(1, 1, Math.PI)).toBe(1);
    expect(junctionReach(1, 0.1, (170 * Math.PI) / 180)).toBe(1);
  });

  test('two equal tubes at a right angle: √2 radii', () => {
    expect(junctionReach(1, 1, Math.PI / 2)).toBeCloseTo(Math.SQRT2, 12);
  });

  test('none for tubes in one direction', () => {
    expect(junctionReach(1, 1, 0)).toBe(Infinity);
  });
});
