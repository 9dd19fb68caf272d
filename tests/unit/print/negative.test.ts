import { describe, expect, it } from 'vitest';
import { buildLumen } from '../../../src/mesh/build-lumen.ts';
import { extendCaps } from '../../../src/mesh/extend-caps.ts';
import { measureLumen } from '../../../src/mesh/measure-lumen.ts';
import { leastWall } from '../../../src/print/least-wall.ts';
import { makeNegative } from '../../../src/print/negative.ts';
import type { Shape } from '../../../src/spec/types.ts';
import { buildTissue } from '../../../src/tissue/build-tissue.ts';
import { forkSketch, sketchForest, straightSketch } from '../../support/lumen-forests.ts';

const NONE = new Map();
const box = (min: [number, number, number], max: [number, number, number]): Shape => ({ shape: 'box', min, max });

/** Signed volume, edges that are not shared by two triangles the two ways round, and Euler characteristic. */
function judge({ position, triangle }: { position: Float64Array; triangle: Int32Array }) {
  let volume = 0;
  const sides = new Map<string, number>();
  const used = new Set<number>();
  for (let t = 0; t < triangle.length; t += 3) {
    const [a, b, c] = [0, 1, 2].map((k) => [0, 1, 2].map((i) => position[3 * triangle[t + k]! + i]!));
    volume +=
      (a![0]! * (b![1]! * c![2]! - b![2]! * c![1]!) +
        a![1]! * (b![2]! * c![0]! - b![0]! * c![2]!) +
        a![2]! * (b![0]! * c![1]! - b![1]! * c![0]!)) /
      6;
    for (let k = 0; k < 3; k++) {
      const [from, to] = [triangle[t + k]!, triangle[t + ((k + 1) % 3)]!];
      used.add(from);
      sides.set(`${from} ${to}`, (sides.get(`${from} ${to}`) ?? 0) + 1);
    }
  }
  let loose = 0;
  for (const [side, count] of sides) {
    const [from, to] = side.split(' ');
    if (count !== 1 || sides.get(`${to} ${from}`) !== 1) loose++;
  }
  return { volume, loose, euler: used.size - sides.size / 2 + triangle.length / 3 };
}

describe('a printable negative', () => {
  it('of one blind channel is the block less the channel', async () => {
    // 3 mm of channel in the block, 0.2 mm wide; 12 mm of it stick out.
    const forest = extendCaps(sketchForest(straightSketch(1e-4, 3e-3)), 6, 'roots').forest;
    const shape = box([0, -1e-3, -1e-3], [5e-3, 1e-3, 1e-3]);
    const { surface, block, channels, problems } = await makeNegative(buildLumen(forest), shape, NONE);
    expect(problems).toEqual([]);
    expect(block).toBeCloseTo(5e-3 * 2e-3 * 2e-3, 15);
    // Rings have the area of the circle; between two of them, turned against each other, the channel is a hair wider.
    expect(Math.abs(channels / (Math.PI * 1e-8 * 3e-3) - 1)).toBeLessThan(0.005);
    const { volume, loose, euler } = judge(surface);
    expect(loose).toBe(0);
    expect(euler).toBe(2);
    expect(volume / (block - channels)).toBeCloseTo(1, 5);
  });

  it('of a channel that does not reach the surface is told', async () => {
    const forest = sketchForest(straightSketch(1e-4, 3e-3));
    const shape = box([-1e-3, -1e-3, -1e-3], [5e-3, 1e-3, 1e-3]);
    const { problems } = await makeNegative(buildLumen(forest), shape, NONE);
    expect(problems).toEqual([expect.stringMatching(/has 2 surfaces, wanted 1/)]);
  });

  it.each<[string, Shape, number]>([
    ['a ball', { shape: 'sphere', center: [4e-3, 0, 0], radius: 5e-3 }, (4 / 3) * Math.PI * 125e-9],
    [
      'an ellipsoid',
      { shape: 'ellipsoid', center: [4e-3, 0, 0], radii: [5e-3, 6e-3, 4e-3] },
      (4 / 3) * Math.PI * 120e-9,
    ],
    [
      'a cylinder askew',
      { shape: 'cylinder', from: [-1e-3, -2e-3, -2e-3], to: [9e-3, 2e-3, 2e-3], radius: 5e-3 },
      Math.PI * 25e-6 * Math.sqrt(100e-6 + 16e-6 + 16e-6),
    ],
    [
      'a box with a ball taken out',
      {
        shape: 'difference',
        of: box([-1e-3, -5e-3, -5e-3], [9e-3, 5e-3, 5e-3]),
        minus: [{ shape: 'sphere', center: [9e-3, 5e-3, 5e-3], radius: 2e-3 }],
      },
      1e-6 - ((4 / 3) * Math.PI * 8e-9) / 8,
    ],
  ])('of a fork in %s', async (_, shape, volume) => {
    const fork = sketchForest(forkSketch(40, 30, 0.8, 0.6, 4e-4));
    const start = 4e-3 - 0.5 * fork.position[3]!;
    const forest = { ...fork, position: fork.position.map((x, i) => (i % 3 === 0 ? x + start : x)) };
    const out = extendCaps(forest, 12, 'roots').forest;
    const lumen = buildLumen(out);
    const { surface, block, channels, problems } = await makeNegative(lumen, shape, NONE);
    expect(problems).toEqual([]);
    // Flat faces lie a little inside round ones.
    expect(block / volume).toBeGreaterThan(0.999);
    expect(block / volume).toBeLessThan(1 + 1e-5);
    const judged = judge(surface);
    expect(judged.loose).toBe(0);
    expect(judged.euler).toBe(2);
    expect(judged.volume / (block - channels)).toBeCloseTo(1, 5);
    expect(channels).toBeLessThan(measureLumen(lumen).volume);
    expect(channels).toBeGreaterThan(0.3 * measureLumen(lumen).volume);
  });

  it('is of a surface that was read, and refuses one that is open', async () => {
    const forest = extendCaps(sketchForest(straightSketch(1e-4, 3e-3)), 6, 'roots').forest;
    const corners = [0, 1, 2, 3, 4, 5, 6, 7].flatMap((i) => [i & 1 ? 5 : 0, i & 2 ? 1 : -1, i & 4 ? 1 : -1]);
    const faces = [
      0, 2, 1, 1, 2, 3, 4, 5, 6, 5, 7, 6, 0, 1, 4, 1, 5, 4, 2, 6, 3, 3, 6, 7, 0, 4, 2, 2, 4, 6, 1, 3, 5, 3, 7, 5,
    ];
    const surface = { position: Float64Array.from(corners), triangle: Int32Array.from(faces) };
    const shape: Shape = { shape: 'surface', file: 'block.stl', unit: 'mm' };
    const { block, problems } = await makeNegative(buildLumen(forest), shape, new Map([['block.stl', surface]]));
    expect(problems).toEqual([]);
    expect(block).toBeCloseTo(5e-3 * 2e-3 * 2e-3, 15);
    const open = { ...surface, triangle: surface.triangle.slice(3) };
    await expect(makeNegative(buildLumen(forest), shape, new Map([['block.stl', open]]))).rejects.toThrow(
      /block.stl.*bounds no solid/,
    );
  });
});

describe('least walls', () => {
  const tissue = buildTissue(box([0, -3e-3, -3e-3], [10e-3, 3e-3, 3e-3]), NONE);

  it('are those between two channels, and to the surface', () => {
    // Two channels along x from opposite faces, 1 mm apart.
    const forest = sketchForest(
      [
        [-1, 0, 0, 0, 1e-4],
        [0, 2e-3, 0, 0, 1e-4],
        [1, 4e-3, 0, 0, 1e-4],
      ],
      [
        [-1, 10e-3, 1e-3, 0, 0.8e-4],
        [0, 8e-3, 1e-3, 0, 0.8e-4],
        [1, 3e-3, 1e-3, 0, 0.8e-4],
      ],
    );
    const wall = leastWall(forest, tissue);
    expect(wall.between).toBeCloseTo(1e-3 - 1e-4 - 0.8e-4, 12);
    expect(wall.rows).toEqual([2, 5]);
    // The bend at x = 2 mm is nearest to the face at x = 0; the first vessels, which open there, do not count.
    const exact = 2e-3 - 1e-4;
    expect(wall.outerRow).toBe(2);
    expect(wall.outer).toBeLessThanOrEqual(exact);
    expect(wall.outer).toBeGreaterThan(exact - 1e-4 / 8 - 1e-12);
  });

  it('between two there are none where there is one', () => {
    const wall = leastWall(sketchForest(straightSketch(1e-4, 3e-3)), tissue);
    expect(wall.between).toBe(Infinity);
    expect(wall.outer).toBe(Infinity);
  });
});
