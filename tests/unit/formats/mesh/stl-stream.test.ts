import { mkdtempSync, readFileSync, rmSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { describe, expect, it } from 'vitest';
import { readSolids } from '../../../../src/check/lumen/solids.ts';
import { encodeBinaryStl } from '../../../../src/formats/mesh/stl.ts';
import { attributeOf, streamBinaryStl } from '../../../../src/formats/mesh/stl-stream.ts';
import { buildLumen } from '../../../../src/mesh/build-lumen.ts';
import type { LumenPatch } from '../../../../src/mesh/lumen.ts';
import { LumenPlan } from '../../../../src/mesh/lumen-plan.ts';
import { lumenPieces } from '../../../../src/mesh/stream-lumen.ts';
import { writeContent } from '../../../../src/node/large-files.ts';
import { forkSketch, sketchForest } from '../../../support/lumen-forests.ts';

/** The 50 bytes of each triangle, from its first corner in order, sorted. */
function facets(bytes: Uint8Array): string[] {
  const view = new DataView(bytes.buffer, bytes.byteOffset, bytes.byteLength);
  return Array.from({ length: view.getUint32(80, true) }, (_, f) => {
    const at = 84 + 50 * f;
    const corner = (k: number) => [0, 4, 8].map((i) => view.getFloat32(at + 12 + 12 * k + i, true)).join(' ');
    const corners = [corner(0), corner(1), corner(2)];
    const first = corners.indexOf(corners.toSorted()[0]!);
    return `${[0, 1, 2].map((k) => corners[(first + k) % 3]).join(', ')}: ${view.getUint16(at + 48, true)}`;
  }).toSorted();
}

describe.each(['m', 'mm'] as const)('a binary STL in %s made while it is written', (unit) => {
  it('is that of the whole surface', () => {
    const forest = sketchForest(forkSketch(40, 30, 0.8, 0.6));
    const plan = new LumenPlan(forest, { around: 8 });
    let seen = 0;
    const content = streamBinaryStl(lumenPieces(plan), plan.patches, unit, ({ triangles }) => {
      seen += triangles;
    });
    const folder = mkdtempSync(join(tmpdir(), 'stl-'));
    try {
      const path = join(folder, 'a.stl');
      writeContent(path, content);
      const bytes = new Uint8Array(readFileSync(path));
      const mesh = buildLumen(forest, { around: 8 });
      expect(facets(bytes)).toEqual(facets(encodeBinaryStl({ ...mesh, unit: 'm' }, unit)));
      expect(seen).toBe(mesh.patch.length);
      const names = mesh.patches.map(({ name }) => name);
      expect(readSolids('a.stl', bytes, names).solid.length).toBe(seen);
      expect(Buffer.from(bytes.subarray(0, 80)).toString()).toMatch(
        /^lumen surface, unit m?m, attribute word: patch number/,
      );
    } finally {
      rmSync(folder, { recursive: true, force: true });
    }
  });
});

it('tells kinds where there are more patches than the word can number', () => {
  const patch = (kind: LumenPatch['kind']) => ({ kind }) as LumenPatch;
  const few = attributeOf([patch('wall'), patch('inlet'), patch('outlet')]);
  expect([...few.words]).toEqual([0, 1, 2]);
  const many = attributeOf([patch('wall'), patch('inlet'), ...new Array<LumenPatch>(65_536).fill(patch('outlet'))]);
  expect([many.words[0], many.words[1], many.words[65_537]]).toEqual([0, 1, 2]);
  expect([few.meaning, many.meaning]).toEqual(['patch number', '0 wall, 1 inlet, 2 outlet']);
});
