import { describe, expect, it } from 'vitest';
import { buildLumen } from '../../../src/mesh/build-lumen.ts';
import type { LumenMesh } from '../../../src/mesh/lumen.ts';
import { type LumenPiece, streamLumen } from '../../../src/mesh/stream-lumen.ts';
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
    const streamed = streamLumen(forest, { around, axialStretch }, (piece) => {
      for (let t = 0; t < piece.triangles; t++) pieces.push(tell(piece, t));
    });
    expect(pieces.length).toBe(streamed.triangles);
    expect(pieces.toSorted()).toEqual(all(whole));
    expect(streamed.patches).toEqual(whole.patches);
    expect(streamed.problems).toEqual(whole.problems);
  });
});

it('comes in pieces where it is large', () => {
  const forest = sketchForest(randomSketch('pieces', { vessels: 120, leastRatio: 0.3 }));
  let pieces = 0;
  let triangles = 0;
  const { triangles: told } = streamLumen(forest, { around: 24 }, (piece) => {
    pieces++;
    triangles += piece.triangles;
  });
  expect(pieces).toBeGreaterThan(1);
  expect(triangles).toBe(told);
});
