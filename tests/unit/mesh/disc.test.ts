import { expect, it } from 'vitest';
import { buildDisc } from '../../../src/mesh/disc.ts';
import { judgeAngle, judgeTopology } from '../../support/lumen-judge.ts';

it.each([8, 9, 11, 12, 16, 23, 24, 36, 64, 101])('fills a rim of %d corners', (around) => {
  const disc = buildDisc(around);
  const position: number[] = [];
  for (let j = 0; j < around; j++)
    position.push(Math.cos((2 * Math.PI * j) / around), Math.sin((2 * Math.PI * j) / around), 0);
  for (let i = 0; i < disc.inner.length; i += 2) position.push(disc.inner[i]!, disc.inner[i + 1]!, 0);
  const surface = { position, triangle: disc.triangle };
  expect(judgeAngle(surface)).toBeGreaterThan(29);
  const topology = judgeTopology(surface);
  // A disc: V − E + F = 1, and the rim is all that is open.
  expect(topology).toMatchObject({ euler: 1, openEdges: around, components: 1, misoriented: 0 });
  let area = 0;
  for (let t = 0; t < disc.triangle.length; t += 3) {
    const [a, b, c] = [0, 1, 2].map((k) => 3 * disc.triangle[t + k]!) as [number, number, number];
    const twice =
      (position[b]! - position[a]!) * (position[c + 1]! - position[a + 1]!) -
      (position[b + 1]! - position[a + 1]!) * (position[c]! - position[a]!);
    expect(twice).toBeGreaterThan(0);
    area += twice / 2;
  }
  expect(area).toBeCloseTo((around / 2) * Math.sin((2 * Math.PI) / around), 12);
});
