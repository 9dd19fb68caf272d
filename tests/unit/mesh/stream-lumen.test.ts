import { describe, expect, it } from 'vitest';
import { buildLumen } from '../../../src/mesh/build-lumen.ts';
import type { LumenMesh } from '../../../src/mesh/lumen.ts';
import { LumenPlan } from '../../../src/mesh/lumen-plan.ts';
import { measureLumen } from '../../../src/mesh/measure-lumen.ts';
import { RunningFigures } from '../../../src/mesh/running-figures.ts';
import { type LumenPiece, lumenPieces } from '../../../src/mesh/stream-lumen.ts';
import { forkSketch, randomSketch, sketchForest, straightSketch } from '../../support/lumen-forests.ts';

/** A triangle by the bits of its corners, from its first in order, with patch and vessel. */
function tell(mesh: Pick<LumenPiece, 'position' | 'triangle' | 'patch' | 'vessel'>, t: number): string {
  const corners = [0, 1, 2].map((k) => {
    const v = mesh.triangle[3 * t + k]!;
    return [0, 1, 2].map((i) => mesh.position[3 * v + i]!).join(' ');
  });
  const first = corners.indexOf(corners.toSorted()[0]!);
  const turned = [0, 1, 2].map((k) => corners[(first + k) % 3]!);
  return `${turned.join(', ')}: ${mesh.patch[t]} ${mesh.vessel[t]}`;
}

const all = (mesh: LumenMesh) => Array.from({ length: mesh.patch.length }, (_, t) => tell(mesh, t)).toSorted();

describe.each([
  ['a straight vessel', 6, 1, sketchForest(straightSketch(1e-4, 3e-3))],
  ['a fork', 6, 3.5, sketchForest(forkSketch(40, 30, 0.8, 0.6))],
  ['two trees', 12, 1, sketchForest(forkSketch(40, 30, 0.8, 0.6), straightSketch(1e-4, 3e-3))],
  ['a random tree', 12, 2, sketchForest(randomSketch('stream', { vessels: 40, leastRatio: 0.3 }))],
] as const)('%s, %i around', (_, around, axialStretch, forest) => {
  it('is the same in pieces as in one', () => {
    const whole = buildLumen(forest, { around, axialStretch });
    const pieces: string[] = [];
    const plan = new LumenPlan(forest, { around, axialStretch });
    const figures = new RunningFigures();
    for (const piece of lumenPieces(plan)) {
      figures.see(piece);
      for (let t = 0; t < piece.triangles; t++) pieces.push(tell(piece, t));
    }
    expect(pieces.length).toBe(figures.triangles);
    expect(pieces.toSorted()).toEqual(all(whole));
    expect(plan.patches).toEqual(whole.patches);
    expect(plan.problems).toEqual(whole.problems);
    expect(Math.abs(plan.triangles / figures.triangles - 1)).toBeLessThan(0.25);
    const measured = measureLumen(whole);
    for (const key of ['smallestAngle', 'longestEdge', 'volume', 'area'] as const)
      expect(figures[key] / measured[key]).toBeCloseTo(1, 9);
  });
});

it('comes in pieces where it is large', () => {
  const plan = new LumenPlan(sketchForest(randomSketch('pieces', { vessels: 120, leastRatio: 0.3 })), { around: 24 });
  expect([...lumenPieces(plan)].length).toBeGreaterThan(1);
});
