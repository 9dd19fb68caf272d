import { describe, expect, it } from 'vitest';
import { type Random, randomStream } from '../../src/core/random.ts';
import { growRun } from '../../src/run.ts';
import { specFromValue } from '../../src/spec/parse.ts';
import type { DemandPart, Spec } from '../../src/spec/types.ts';
import { specToJson } from '../../src/spec/write.ts';
import { buildTissue } from '../../src/tissue/build-tissue.ts';
import { randomSpec } from '../support/random-specs.ts';

/** Parts of random demand about a tissue: balls, boxes and what is left of a ball. */
function randomDemand(spec: Spec, random: Random): DemandPart[] {
  const { min, max } = buildTissue(spec.tissue, new Map());
  const size = Math.cbrt((max[0] - min[0]) * (max[1] - min[1]) * (max[2] - min[2]));
  const place = () =>
    [0, 1, 2].map((k) => min[k as 0] + random.next() * (max[k as 0] - min[k as 0])) as [number, number, number];
  return Array.from({ length: 1 + Math.floor(3 * random.next()) }, (): DemandPart => {
    const [x, y, z] = place();
    const radius = size * (0.1 + 0.3 * random.next());
    const ball = { shape: 'sphere', center: [x, y, z], radius } as const;
    const cube = {
      shape: 'box',
      min: [x - radius, y - radius, z - radius],
      max: [x + radius, y + radius, z + radius],
    } as const;
    const weight = random.next() < 0.25 ? 0 : Math.exp(5 * (random.next() - 0.4));
    const kind = random.next();
    if (kind < 0.4) return { shape: ball, weight };
    if (kind < 0.8) return { shape: cube, weight };
    return { shape: { shape: 'difference', of: cube, minus: [{ ...ball, radius: 0.9 * radius }] }, weight };
  });
}

describe('growth over random demand', () => {
  for (let block = 0; block < 4; block++) {
    it(`specs ${block * 10 + 1} to ${block * 10 + 10}: every promise holds, flows follow territories, bytes repeat`, () => {
      for (let i = block * 10 + 1; i <= block * 10 + 10; i++) {
        const random = randomStream('random demand', String(i));
        const plain = randomSpec(random, `d${i}`, 40);
        const demand = randomDemand(plain, random);
        const shared = random.next() < 0.7;
        const spec: Spec = {
          ...plain,
          demand,
          trees: plain.trees.map((tree) =>
            shared ? { ...tree, terminals: { ...tree.terminals, byTerritory: true } } : tree,
          ),
        };
        expect(specFromValue(JSON.parse(specToJson(spec)))).toEqual(spec);
        const { record, check, stopped, shortfalls } = growRun(spec, new Map());
        const broken = check.findings.filter((finding) => finding.promise !== 'terminals');
        expect(broken.map((finding) => `spec ${i}: ${finding.promise}: ${finding.message}`)).toEqual([]);
        expect(shortfalls.length > 0).toBe(stopped !== 'complete');
        expect(record.territory != null).toBe(shared);
        expect(check.promises.some((promise) => promise.id === 'territory' && promise.held)).toBe(shared);
        if (i % 5 === 0) {
          const again = growRun(spec, new Map()).record;
          expect(again.forest).toEqual(record.forest);
          expect(again.territory).toEqual(record.territory);
        }
      }
    });
  }
});
