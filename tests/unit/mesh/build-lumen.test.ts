import { describe, expect, it } from 'vitest';
import { InputError } from '../../../src/core/errors.ts';
import { randomStream } from '../../../src/core/random.ts';
import { buildLumen } from '../../../src/mesh/build-lumen.ts';
import type { LumenMesh } from '../../../src/mesh/lumen.ts';
import type { LumenOptions } from '../../../src/mesh/lumen-plan.ts';
import type { Forest } from '../../../src/tree/forest.ts';
import { countVessels, rowOfVessel, tubeLength } from '../../../src/tree/vessels.ts';
import { judgeCaps } from '../../support/lumen-caps.ts';
import {
  bendSketch,
  chainSketch,
  forkSketch,
  randomSketch,
  type Sketch,
  sketchForest,
  straightSketch,
} from '../../support/lumen-forests.ts';
import { judgeAngle, judgeCrossings, judgeTopology, judgeVolume } from '../../support/lumen-judge.ts';

function networkVolume(forest: Forest): number {
  let sum = 0;
  for (let row = 0; row < forest.count; row++) sum += Math.PI * forest.radius[row]! ** 2 * tubeLength(forest, row);
  return sum;
}

/** Everything the README promises of a lumen surface, by judges that share nothing with the builder. */
function expectSound(mesh: LumenMesh, forest: Forest): void {
  expect(mesh.problems).toEqual([]);
  const trees = forest.treeStart.length - 1;
  expect(judgeTopology(mesh)).toMatchObject({
    openEdges: 0,
    misoriented: 0,
    pinched: 0,
    components: trees,
    euler: 2 * trees,
  });
  expect(judgeVolume(mesh)).toBeGreaterThan(0);
  expect(judgeAngle(mesh)).toBeGreaterThanOrEqual(15);
  expect(judgeCrossings(mesh)).toEqual([]);
  const caps = judgeCaps(mesh);
  expect(new Set(caps.map((cap) => cap.name)).size).toBe(caps.length);
  for (const cap of caps) {
    expect(cap.flat, cap.name).toBeLessThan(1e-9);
    expect(cap.area, cap.name).toBeLessThan(1e-9);
    expect(cap.centre, cap.name).toBeLessThan(1e-9);
    expect(cap.square, cap.name).toBeGreaterThan(1 - 1e-9);
    expect(cap.rimEdges, cap.name).toBe(mesh.around);
    if (mesh.around >= 24) expect(cap.rimEdge, cap.name).toBeLessThan(0.3);
    // The wall of a strip leans by the sagitta of a segment, a few degrees.
    expect(cap.sharp, cap.name).toBeLessThan(0.2);
  }
}

function build(sketch: Sketch, options: LumenOptions = {}): { mesh: LumenMesh; forest: Forest } {
  const forest = sketchForest(sketch);
  return { forest, mesh: buildLumen(forest, options) };
}

describe('buildLumen', () => {
  it('draws a straight vessel as a capped tube of its volume', () => {
    const { mesh, forest } = build(straightSketch(1e-3, 8e-3));
    expectSound(mesh, forest);
    // Staggered rings of 24 hold 0.29 % more than the prism over their polygon, which has the circle's area.
    expect(judgeVolume(mesh) / networkVolume(forest)).toBeCloseTo(1.0029, 3);
    expect(mesh.patches.map((patch) => patch.name)).toEqual(['wall', 'inlet_0', 'outlet_0']);
    expect(mesh.patches[1]).toMatchObject({ kind: 'inlet', row: 0, normal: [-1, -0, -0], radius: 1e-3 });
    expect(mesh.patches[2]).toMatchObject({ kind: 'outlet', row: 1, normal: [1, 0, 0], centre: [8e-3, 0, 0] });
  });

  it('keeps edges to 0.3 radii by default', () => {
    const { mesh, forest } = build(forkSketch(37.5, 37.5, 0.79, 0.79));
    let worst = 0;
    mesh.vessel.forEach((vessel, t) => {
      const r = forest.radius[rowOfVessel(forest, vessel)]!;
      for (let k = 0; k < 3; k++) {
        const a = 3 * mesh.triangle[3 * t + k]!;
        const b = 3 * mesh.triangle[3 * t + ((k + 1) % 3)]!;
        const d = [0, 1, 2].map((m) => mesh.position[a + m]! - mesh.position[b + m]!);
        worst = Math.max(worst, Math.hypot(...d) / r);
      }
    });
    expect(worst).toBeLessThanOrEqual(0.3);
  });

  // Daughters at equal angles each side: 25°, 75° and 120° between them, and as close as a T.
  it.each([25, 40, 75, 120, 160])('joins a fork of %d degrees', (angle) => {
    const { mesh, forest } = build(forkSketch(angle / 2, angle / 2, 0.79, 0.79));
    expectSound(mesh, forest);
    // Junctions overlap: the network counts what the tubes share twice. Here the sides are as short as can be.
    expect(Math.abs(judgeVolume(mesh) / networkVolume(forest) - 1)).toBeLessThan(0.08);
  });

  it.each([
    [25, 0.2],
    [45, 0.2],
    [90, 0.2],
    [25, 0.1],
    [60, 0.1],
    [90, 0.1],
    [120, 0.1],
    [25, 0.05],
    [155, 0.03],
    [90, 0.02],
  ])('joins a side branch at %d degrees, %d of the trunk in radius', (angle, ratio) => {
    const { mesh, forest } = build(forkSketch(angle, 0, ratio, 0.99));
    expectSound(mesh, forest);
    expect(Math.abs(judgeVolume(mesh) / networkVolume(forest) - 1)).toBeLessThan(0.03);
  });

  it.each([30, 60, 90, 135, 175])('turns a bend of %d degrees between the sides', (angle) => {
    const { mesh, forest } = build(bendSketch(angle));
    expectSound(mesh, forest);
  });

  it.each([
    [12, 60, 0.4],
    [8, 30, 0.6],
    [8, 90, 0.15],
  ])('joins a chain of %d junctions at %d degrees, every vessel as short as allowed', (links, angle, ratio) => {
    const { mesh, forest } = build(chainSketch(links, angle, ratio));
    expectSound(mesh, forest);
  });

  it.each([
    ['a', 5, 24, 0.3],
    ['b', 12, 24, 0.1],
    // Has junctions whose first mesh has angles below 15°.
    ['s1', 80, 24, 0.1],
    ['e', 120, 12, 0.02],
    ['f', 200, 12, 0.3],
  ])('meshes random tree %s of about %d vessels with %d segments', (seed, vessels, around, leastRatio) => {
    const { mesh, forest } = build(randomSketch(seed, { vessels, leastRatio }), { around });
    expectSound(mesh, forest);
    expect(countVessels(forest)).toBeGreaterThan(vessels / 3);
  });

  it('stretches tubes along their axes when asked', () => {
    const plain = build(straightSketch(1e-3, 20e-3)).mesh;
    const { mesh, forest } = build(straightSketch(1e-3, 20e-3), { axialStretch: 3.5 });
    expectSound(mesh, forest);
    expect(mesh.triangle.length).toBeLessThan(0.45 * plain.triangle.length);
  });

  it('works at any scale and far from the origin', () => {
    for (const [scale, shift] of [
      [4e-6, 0],
      [1e-3, 1],
      [1, 0],
    ] as const) {
      const sketch = forkSketch(30, 45, 0.7, 0.5, scale).map(
        ([parent, x, y, z, r]) => [parent, x + shift, y - shift, z + shift, r] as const,
      );
      const { mesh, forest } = build(sketch);
      expect(mesh.problems).toEqual([]);
      expect(judgeAngle(mesh)).toBeGreaterThanOrEqual(15);
      expect(judgeTopology(mesh)).toMatchObject({ openEdges: 0, euler: 2, components: 1 });
      expect(Math.abs(judgeVolume(mesh) / networkVolume(forest) - 1)).toBeLessThan(0.06);
    }
  });

  it('makes one surface a tree and names caps by what the blood does', () => {
    const shifted = forkSketch(40, 40, 0.8, 0.8).map(([p, x, y, z, r]) => [p, x, y + 0.05, z, r] as const);
    const forest = sketchForest(forkSketch(40, 40, 0.8, 0.8), shifted);
    const mesh = buildLumen(forest, { kinds: ['supply', 'drain'] });
    expectSound(mesh, forest);
    expect(mesh.patches.map((patch) => `${patch.kind} ${patch.name}`)).toEqual([
      'wall wall',
      'inlet inlet_0',
      'outlet outlet_1',
      'outlet outlet_2',
      'outlet outlet_tree_1',
      'inlet inlet_vessel_4',
      'inlet inlet_vessel_5',
    ]);
  });

  it('keeps the wall on the tubes and fillets narrow', () => {
    const { mesh, forest } = build(forkSketch(37.5, 37.5, 0.79, 0.79));
    // Distance of each wall corner from the nearest tube's wall, over that tube's radius.
    const off: number[] = [];
    let widest = 0;
    for (let v = 0; v < mesh.row.length; v++) {
      let nearest = Infinity;
      let radius = 1;
      for (let row = 0; row < forest.count; row++) {
        const parent = forest.parent[row]!;
        if (parent < 0) continue;
        const at = (i: number): number[] => [0, 1, 2].map((k) => forest.position[3 * i + k]!);
        const [a, b] = [at(parent), at(row)];
        const q = [0, 1, 2].map((k) => mesh.position[3 * v + k]!);
        const u = b.map((x, k) => x - a[k]!);
        const length = Math.hypot(...u);
        const s = Math.max(0, Math.min(1, q.reduce((sum, x, k) => sum + (x - a[k]!) * u[k]!, 0) / length ** 2));
        const distance = Math.hypot(...q.map((x, k) => x - a[k]! - s * u[k]!)) - forest.radius[row]!;
        if (distance < nearest) {
          nearest = distance;
          radius = forest.radius[row]!;
        }
      }
      const cap = mesh.along[v] === 0 || mesh.along[v] === 1;
      if (cap) continue;
      off.push(Math.abs(nearest) / radius);
      widest = Math.max(widest, nearest / radius);
    }
    off.sort((a, b) => a - b);
    expect(off[Math.floor(off.length / 2)]).toBeLessThan(0.03);
    // A fillet that reaches 0.3 r along both walls of a crease stands off it by at most 0.15 r.
    expect(widest).toBeLessThan(0.15);
  });

  it('runs along from the root-side node to the far one', () => {
    const { mesh, forest } = build(forkSketch(37.5, 37.5, 0.79, 0.79));
    for (let v = 0; v < mesh.row.length; v++) {
      const row = mesh.row[v]!;
      const parent = forest.parent[row]!;
      const t = mesh.along[v]!;
      expect(t).toBeGreaterThanOrEqual(0);
      expect(t).toBeLessThanOrEqual(1);
      // The place on the axis is no farther from the corner than the radius and a fillet.
      const d = [0, 1, 2].map((k) => {
        const a = forest.position[3 * parent + k]!;
        const b = forest.position[3 * row + k]!;
        return mesh.position[3 * v + k]! - a - t * (b - a);
      });
      expect(Math.hypot(...d)).toBeLessThan(1.2 * forest.radius[row]!);
    }
  });

  it('gives the same numbers for the same forest', () => {
    const forest = sketchForest(randomSketch('same', { vessels: 20 }));
    expect(buildLumen(forest)).toEqual(buildLumen(forest));
  });

  it('says which vessel is too short for its junctions, and still closes the surface', () => {
    const sketch: Sketch = [
      [-1, 0, 0, 0, 1e-3],
      [0, 6e-3, 0, 0, 1e-3],
      [1, 7e-3, 0, 0, 1e-3],
      [1, 6e-3, 8e-3, 0, 0.9e-3],
      [2, 14e-3, 1e-3, 0, 0.7e-3],
      [2, 12e-3, -5e-3, 0, 0.7e-3],
    ];
    const { mesh } = build(sketch);
    expect(mesh.problems.map((problem) => problem.row)).toContain(2);
    expect(mesh.problems.find((problem) => problem.row === 2)?.why).toMatch(/length 0.001.* m, but the junctions/);
    expect(judgeTopology(mesh)).toMatchObject({ openEdges: 0, misoriented: 0 });
  });

  it('says which end has no straight run', () => {
    const { mesh } = build([
      [-1, 0, 0, 0, 1e-3],
      [0, 8e-3, 0, 0, 1e-3],
      [1, 8e-3, 2.5e-3, 0, 1e-3],
    ]);
    expect(mesh.problems.some((problem) => problem.why.startsWith('straight run before its cap'))).toBe(true);
  });

  it('closes the surface of any tree, however its vessels run into each other, and says so', () => {
    let strained = 0;
    for (let seed = 0; seed < 24; seed++) {
      const random = randomStream(`tangle ${seed}`, 'lumen');
      const sketch: (readonly [number, number, number, number, number])[] = [[-1, 0, 0, 0, 0.1]];
      for (let k = 1; k < 9; k++) {
        const at = (): number => 3 * random.next();
        const parent = k === 1 ? 0 : 1 + Math.floor(random.next() * (k - 1));
        sketch.push([parent, at(), at(), at(), 0.02 + 0.3 * random.next()]);
      }
      const mesh = buildLumen(sketchForest(sketch), { around: 8 });
      expect(judgeTopology(mesh)).toMatchObject({ openEdges: 0, misoriented: 0, components: 1, euler: 2 });
      if (mesh.problems.length > 0) strained++;
      else expect(judgeAngle(mesh)).toBeGreaterThanOrEqual(15);
    }
    expect(strained).toBeGreaterThan(3);
  });

  it('joins two daughters that leave along one line as well as can be', () => {
    const { mesh } = build([
      [-1, 0, 0, 0, 1e-3],
      [0, 6e-3, 0, 0, 1e-3],
      [1, 12e-3, 0, 0, 0.5e-3],
      [1, 14e-3, 0, 0, 0.5e-3],
    ]);
    expect(mesh.problems.length).toBeGreaterThan(0);
    expect(judgeTopology(mesh)).toMatchObject({ openEdges: 0, misoriented: 0, components: 1, euler: 2 });
  });

  it('refuses a vessel of no length', () => {
    const sketch: Sketch = [
      [-1, 0, 0, 0, 1e-3],
      [0, 6e-3, 0, 0, 1e-3],
      [1, 6e-3, 0, 0, 1e-3],
    ];
    expect(() => build(sketch)).toThrow('vessel 1: got a vessel of no length, expected two places apart');
  });

  it('refuses options out of range', () => {
    const forest = sketchForest(straightSketch(1e-3, 8e-3));
    expect(() => buildLumen(forest, { around: 5 })).toThrow(InputError);
    expect(() => buildLumen(forest, { around: 20.5 })).toThrow(
      'around: got 20.5, expected a whole number from 6 to 256',
    );
    expect(() => buildLumen(forest, { axialStretch: 0.5 })).toThrow('axialStretch: got 0.5, expected 1 to 3.5');
  });
});
