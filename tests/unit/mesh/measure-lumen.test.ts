import { expect, it } from 'vitest';
import { buildLumen } from '../../../src/mesh/build-lumen.ts';
import { measureLumen } from '../../../src/mesh/measure-lumen.ts';
import { forkSketch, sketchForest, straightSketch } from '../../support/lumen-forests.ts';
import { judgeAngle, judgeTopology, judgeVolume } from '../../support/lumen-judge.ts';

/** Corner of a cube of side 2: three right angles, apex at the origin. */
const TETRAHEDRON = {
  position: Float64Array.of(0, 0, 0, 2, 0, 0, 0, 2, 0, 0, 0, 2),
  triangle: Int32Array.of(0, 2, 1, 0, 1, 3, 0, 3, 2, 1, 2, 3),
  patch: Int32Array.of(0, 0, 0, 1),
};

it('measures a tetrahedron', () => {
  const figures = measureLumen(TETRAHEDRON);
  expect(figures).toMatchObject({ vertices: 4, edges: 6, triangles: 4, openEdges: 0, misorientedEdges: 0 });
  expect(figures).toMatchObject({ components: 1, euler: 4 - 6 + 4 });
  expect(figures.volume).toBeCloseTo((2 * 2 * 2) / 6, 12);
  expect(figures.wallArea).toBeCloseTo(3 * ((2 * 2) / 2), 12);
  expect(figures.area).toBeCloseTo(3 * ((2 * 2) / 2) + (Math.sqrt(3) / 4) * 8, 12);
  expect(figures.smallestAngle).toBeCloseTo(Math.PI / 4, 12);
  expect(figures.longestEdge).toBeCloseTo(2 * Math.SQRT2, 12);
});

it('sees a hole, a turned triangle and a second part', () => {
  const { position, triangle, patch } = TETRAHEDRON;
  expect(measureLumen({ position, triangle: triangle.slice(3), patch }).openEdges).toBe(3);
  const turned = triangle.slice();
  [turned[0], turned[1]] = [turned[1]!, turned[0]!];
  expect(measureLumen({ position, triangle: turned, patch }).misorientedEdges).toBe(3);
  const twice = {
    position: Float64Array.of(...position, ...position.map((x) => x + 5)),
    triangle: Int32Array.of(...triangle, ...triangle.map((v) => v + 4)),
    patch: Int32Array.of(...patch, ...patch),
  };
  expect(measureLumen(twice)).toMatchObject({ components: 2, euler: 4 });
});

it('agrees with the slow judges on a lumen', () => {
  const mesh = buildLumen(sketchForest(forkSketch(40, 30, 0.8, 0.6), straightSketch(1e-3, 5e-3)));
  const figures = measureLumen(mesh);
  const topology = judgeTopology(mesh);
  expect(figures.edges).toBe(topology.edges);
  expect(figures.euler).toBe(topology.euler);
  expect(figures.components).toBe(2);
  expect((figures.smallestAngle * 180) / Math.PI).toBeCloseTo(judgeAngle(mesh), 9);
  expect(figures.volume / judgeVolume(mesh)).toBeCloseTo(1, 9);
});
