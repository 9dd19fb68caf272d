import { describe, expect, it } from 'vitest';
import { buildLumen } from '../../../src/mesh/build-lumen.ts';
import type { LumenMesh } from '../../../src/mesh/lumen.ts';
import { buildVolume, type VolumeOptions } from '../../../src/volume/build-volume.ts';
import type { LumenVolume } from '../../../src/volume/lumen-volume.ts';
import { measureVolume } from '../../../src/volume/measure-volume.ts';
import {
  bendSketch,
  forkSketch,
  randomSketch,
  type Sketch,
  sketchForest,
  straightSketch,
} from '../../support/lumen-forests.ts';
import { judgeVolume } from '../../support/lumen-judge.ts';
import { judgeVolumeMesh } from '../../support/volume-judge.ts';

function fill(sketch: Sketch, around: number, options: VolumeOptions = {}): { mesh: LumenMesh; volume: LumenVolume } {
  const forest = sketchForest(sketch);
  const mesh = buildLumen(forest, { around });
  return { mesh, volume: buildVolume(mesh, forest, options) };
}

/** Closed under faces, nothing turned over, the surface's volume and its wall. */
function expectSound(mesh: LumenMesh, volume: LumenVolume): void {
  const judged = judgeVolumeMesh(volume);
  expect(judged.unmatched).toBe(0);
  expect(judged.unused).toBe(0);
  expect(judged.flattest).toBeGreaterThan(0);
  const figures = measureVolume(volume);
  expect(figures).toMatchObject({ turnedOver: 0, unmatchedFaces: 0 });
  expect(figures.histogram.reduce((sum, count) => sum + count)).toBe(figures.cells);
  expect(judged.volume / judgeVolume(mesh)).toBeCloseTo(1, 11);
  expect(figures.volume / judged.volume).toBeCloseTo(1, 11);
  // The wall's triangles are the surface's, corner by corner.
  const wallOf = (position: Float64Array, triangle: Int32Array, patch: Int32Array): number[] =>
    Array.from(triangle.filter((_, i) => patch[Math.floor(i / 3)] === 0)).flatMap((v) => [
      ...position.subarray(3 * v, 3 * v + 3),
    ]);
  expect(wallOf(volume.position, volume.triangle, volume.patchOfTriangle)).toEqual(
    wallOf(mesh.position, mesh.triangle, mesh.patch),
  );
}

describe('buildVolume', () => {
  it.each([0, 1, 3, 8])('fills a straight vessel with %d layers', (layers) => {
    const { mesh, volume } = fill(straightSketch(1e-3, 8e-3), 24, { layers });
    expectSound(mesh, volume);
    expect(volume.problems).toEqual([]);
    const strips = volume.sections.count - 1;
    // Two prisms a segment, a layer and a strip, and those of the core.
    expect(volume.prism.length / 6).toBeGreaterThanOrEqual(2 * 24 * layers * strips);
    expect(volume.quad.length / 4).toBe(2 * 24 * layers);
    expect(measureVolume(volume).leastJacobian).toBeGreaterThan(layers === 0 ? 0.4 : 0.2);
  });

  it('gives layers the thickness asked for', () => {
    const { volume } = fill(straightSketch(1e-3, 8e-3), 24, { layers: 4, layerGrowth: 1.5 });
    const { fraction } = volume.sections.disc;
    for (let l = 2; l <= 4; l++)
      expect((fraction[l - 1]! - fraction[l]!) / (fraction[l - 2]! - fraction[l - 1]!)).toBeCloseTo(1.5, 9);
  });

  it.each([
    ['a Y of 75°', forkSketch(37.5, 37.5, 0.79, 0.79), 24, 3],
    ['a Y of 75° of few segments', forkSketch(37.5, 37.5, 0.79, 0.79), 8, 3],
    ['a Y of 120°', forkSketch(60, 60, 0.79, 0.79), 24, 3],
    ['a Y of 120° without layers', forkSketch(60, 60, 0.79, 0.79), 16, 0],
    ['a trunk with a daughter of a fifth', forkSketch(10, 65, 0.95, 0.2), 16, 3],
    ['a bend', bendSketch(90), 24, 3],
  ] as const)('fills %s', (_, sketch, around, layers) => {
    const { mesh, volume } = fill(sketch, around, { layers });
    expectSound(mesh, volume);
    expect(volume.problems).toEqual([]);
    expect(measureVolume(volume).leastJacobian).toBeGreaterThan(0.1);
  });

  it('fills a Y of 25°, and says where layers find no room', () => {
    const { mesh, volume } = fill(forkSketch(12.5, 12.5, 0.79, 0.79), 16, { layers: 3 });
    expectSound(mesh, volume);
    for (const { why } of volume.problems) expect(why).toMatch(/no layers/);
  });

  it.each(['a', 'b', 'c'])('fills random tree %s', (seed) => {
    const { mesh, volume } = fill(randomSketch(seed, { vessels: 12 }), 10, { layers: 2 });
    expectSound(mesh, volume);
    for (const { why } of volume.problems) expect(why).toMatch(/no layers/);
  });

  it('gives the same numbers for the same surface', () => {
    const sketch = forkSketch(30, 50, 0.8, 0.6);
    expect(fill(sketch, 12).volume).toEqual(fill(sketch, 12).volume);
  });

  it('refuses options out of range', () => {
    const sketch = straightSketch(1e-3, 8e-3);
    expect(() => fill(sketch, 12, { layers: 21 })).toThrow('layers: got 21, expected a whole number from 0 to 20');
    expect(() => fill(sketch, 12, { layers: 1.5 })).toThrow('layers: got 1.5');
    expect(() => fill(sketch, 12, { layerGrowth: 0.9 })).toThrow('layerGrowth: got 0.9, expected 1 to 3');
  });
});
